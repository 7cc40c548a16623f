/**
 * Where the simulated stations live. Prefixes follow the ITU's table of international call sign series
 * (Radio Regulations, Appendix 42) and each administration's own call areas; positions come from the
 * program's own table of call areas and countries. The weights are a guess at low-band winter activity
 * as heard in Ireland.
 */
export interface StationArea {
  /** Name for people, such as "United States 4". */
  name: string;
  /** ISO 3166-1 alpha-2 of the country whose series the prefix is in. */
  country: string;
  /** Prefixes without the digit. */
  prefixes: readonly string[];
  /** Digits after the prefix. */
  digits: string;
  /** Share of the population, relative. */
  weight: number;
}

type Row = [name: string, country: string, prefixes: string, digits: string, weight: number];

const rows: Row[] = [
  // British Isles and western Europe
  ['Ireland', 'IE', 'EI', '234569', 2],
  ['England', 'GB', 'G M', '0345678', 14],
  ['Scotland', 'GB', 'GM MM', '0347', 4],
  ['Wales', 'GB', 'GW MW', '0348', 2],
  ['France', 'FR', 'F', '568', 12],
  ['Belgium', 'BE', 'ON', '4567', 6],
  ['Netherlands', 'NL', 'PA PD', '0123', 7],
  ['Germany', 'DE', 'DL DK DJ', '1234567', 24],
  ['Switzerland', 'CH', 'HB', '9', 4],
  ['Austria', 'AT', 'OE', '1356', 4],
  ['Spain', 'ES', 'EA', '123457', 8],
  ['Canary Islands', 'ES', 'EA', '8', 3],
  ['Portugal', 'PT', 'CT', '1', 3],
  ['Azores', 'PT', 'CU', '2378', 2],
  ['Italy', 'IT', 'IK IZ', '1234578', 14],
  // Northern and eastern Europe
  ['Iceland', 'IS', 'TF', '135', 3],
  ['Norway', 'NO', 'LA', '2345679', 5],
  ['Sweden', 'SE', 'SM', '0234567', 8],
  ['Denmark', 'DK', 'OZ', '12345', 4],
  ['Finland', 'FI', 'OH', '12345678', 7],
  ['Poland', 'PL', 'SP', '123456789', 11],
  ['Czechia', 'CZ', 'OK', '12', 8],
  ['Slovakia', 'SK', 'OM', '35', 3],
  ['Hungary', 'HU', 'HA', '13578', 5],
  ['Slovenia', 'SI', 'S5', '0137', 5],
  ['Croatia', 'HR', '9A', '123', 4],
  ['Serbia', 'RS', 'YU', '127', 4],
  ['Romania', 'RO', 'YO', '2345689', 5],
  ['Bulgaria', 'BG', 'LZ', '125', 4],
  ['Greece', 'GR', 'SV', '128', 3],
  ['Lithuania', 'LT', 'LY', '123', 5],
  ['Latvia', 'LV', 'YL', '23', 3],
  ['Estonia', 'EE', 'ES', '1235', 4],
  ['Belarus', 'BY', 'EU', '134678', 3],
  ['Ukraine', 'UA', 'UR UT', '3457', 10],
  ['Turkey', 'TR', 'TA', '1234', 2],
  ['Russia 1', 'RU', 'UA RA', '1', 4],
  ['Russia 3', 'RU', 'UA RK', '3', 7],
  ['Russia 4', 'RU', 'UA RW', '4', 4],
  ['Russia 6', 'RU', 'UA RV', '6', 3],
  ['Russia 9', 'RU', 'UA RT', '9', 6],
  ['Russia 0', 'RU', 'UA RU', '0', 3],
  // Asia
  ['Kazakhstan', 'KZ', 'UN', '7', 2],
  ['Cyprus', 'CY', '5B', '4', 2],
  ['Israel', 'IL', '4X', '146', 2],
  ['Kuwait', 'KW', '9K', '2', 1],
  ['United Arab Emirates', 'AE', 'A6', '14', 1],
  ['India', 'IN', 'VU', '2', 2],
  ['Thailand', 'TH', 'HS', '1258', 1],
  ['Malaysia', 'MY', '9M', '24', 1],
  ['Indonesia', 'ID', 'YB', '0123', 2],
  ['Philippines', 'PH', 'DU', '1237', 1],
  ['China 1', 'CN', 'BG', '1', 1],
  ['China 4', 'CN', 'BG', '4', 2],
  ['China 7', 'CN', 'BG', '7', 1],
  ['Korea', 'KR', 'HL', '125', 2],
  ['Japan 1', 'JP', 'JA JH', '1', 4],
  ['Japan 3', 'JP', 'JA JH', '3', 2],
  ['Japan 6', 'JP', 'JA JH', '6', 2],
  ['Japan 7', 'JP', 'JA JH', '7', 2],
  ['Japan 8', 'JP', 'JA JH', '8', 1],
  // Africa
  ['Morocco', 'MA', 'CN', '8', 2],
  ['Algeria', 'DZ', '7X', '2', 1],
  ['Tunisia', 'TN', '3V', '8', 1],
  ['Egypt', 'EG', 'SU', '1', 1],
  ['Senegal', 'SN', '6W', '7', 1],
  ['Ghana', 'GH', '9G', '5', 1],
  ['Kenya', 'KE', '5Z', '4', 1],
  ['Namibia', 'NA', 'V5', '1', 1],
  ['South Africa', 'ZA', 'ZS', '1256', 3],
  // The Americas
  ['United States 1', 'US', 'W K N', '1', 12],
  ['United States 2', 'US', 'W K N', '2', 8],
  ['United States 3', 'US', 'W K N', '3', 9],
  ['United States 4', 'US', 'W K N', '4', 13],
  ['United States 5', 'US', 'W K N', '5', 7],
  ['United States 6', 'US', 'W K N', '6', 4],
  ['United States 7', 'US', 'W K N', '7', 5],
  ['United States 8', 'US', 'W K N', '8', 9],
  ['United States 9', 'US', 'W K N', '9', 7],
  ['United States 0', 'US', 'W K N', '0', 7],
  ['Canada 1', 'CA', 'VE', '1', 3],
  ['Canada 2', 'CA', 'VE', '2', 3],
  ['Canada 3', 'CA', 'VE', '3', 5],
  ['Canada 6', 'CA', 'VE', '6', 1],
  ['Canada 7', 'CA', 'VE', '7', 2],
  ['Mexico', 'MX', 'XE', '123', 2],
  ['Cuba', 'CU', 'CO', '238', 2],
  ['Jamaica', 'JM', '6Y', '5', 1],
  ['Barbados', 'BB', '8P', '6', 1],
  ['Trinidad and Tobago', 'TT', '9Y', '4', 1],
  ['Venezuela', 'VE', 'YV', '145', 2],
  ['Colombia', 'CO', 'HK', '136', 1],
  ['Peru', 'PE', 'OA', '4', 1],
  ['Brazil 2', 'BR', 'PY', '2', 3],
  ['Brazil 5', 'BR', 'PY', '5', 1],
  ['Brazil 7', 'BR', 'PY', '7', 1],
  ['Argentina', 'AR', 'LU', '12567', 2],
  ['Chile', 'CL', 'CE', '3', 1],
  ['Uruguay', 'UY', 'CX', '257', 1],
  // Oceania
  ['Australia 2', 'AU', 'VK', '2', 1],
  ['Australia 3', 'AU', 'VK', '3', 2],
  ['Australia 6', 'AU', 'VK', '6', 2],
  ['New Zealand', 'NZ', 'ZL', '1234', 2],
];

export const stationAreas: readonly StationArea[] = rows.map(([name, country, prefixes, digits, weight]) => ({
  name,
  country,
  prefixes: prefixes.split(' '),
  digits,
  weight,
}));
