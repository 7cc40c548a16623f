/**
 * Where the simulated stations live. Prefixes follow the ITU's table of international call sign series
 * (Radio Regulations, Appendix 42) and each administration's own call areas; middles and radii are plain
 * geography, rounded. The weights are a guess at low-band winter activity as heard in Ireland.
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
  latitude: number;
  longitude: number;
  radiusKm: number;
  /** Share of the population, relative. */
  weight: number;
}

type Row = [
  name: string,
  country: string,
  prefixes: string,
  digits: string,
  latitude: number,
  longitude: number,
  radiusKm: number,
  weight: number,
];

const rows: Row[] = [
  // British Isles and western Europe
  ['Ireland', 'IE', 'EI', '234569', 53.2, -7.8, 120, 2],
  ['England', 'GB', 'G M', '0345678', 52.4, -1.4, 180, 14],
  ['Scotland', 'GB', 'GM MM', '0347', 56.5, -3.8, 130, 4],
  ['Wales', 'GB', 'GW MW', '0348', 52.3, -3.7, 70, 2],
  ['France', 'FR', 'F', '568', 46.8, 2.4, 350, 12],
  ['Belgium', 'BE', 'ON', '4567', 50.7, 4.6, 80, 6],
  ['Netherlands', 'NL', 'PA PD', '0123', 52.2, 5.4, 90, 7],
  ['Germany', 'DE', 'DL DK DJ', '1234567', 51, 10.2, 280, 24],
  ['Switzerland', 'CH', 'HB', '9', 46.9, 8.2, 90, 4],
  ['Austria', 'AT', 'OE', '1356', 47.6, 14.2, 170, 4],
  ['Spain', 'ES', 'EA', '123457', 40.2, -3.6, 320, 8],
  ['Canary Islands', 'ES', 'EA', '8', 28.3, -15.8, 150, 3],
  ['Portugal', 'PT', 'CT', '1', 39.6, -8.2, 180, 3],
  ['Azores', 'PT', 'CU', '2378', 38.4, -28, 180, 2],
  ['Italy', 'IT', 'IK IZ', '1234578', 42.8, 12.4, 380, 14],
  // Northern and eastern Europe
  ['Iceland', 'IS', 'TF', '135', 64.6, -19, 150, 3],
  ['Norway', 'NO', 'LA', '2345679', 61.5, 9.3, 380, 5],
  ['Sweden', 'SE', 'SM', '0234567', 60.6, 15.5, 420, 8],
  ['Denmark', 'DK', 'OZ', '12345', 55.8, 9.9, 120, 4],
  ['Finland', 'FI', 'OH', '12345678', 62.8, 26, 330, 7],
  ['Poland', 'PL', 'SP', '123456789', 52.1, 19.4, 260, 11],
  ['Czechia', 'CZ', 'OK', '12', 49.8, 15.4, 160, 8],
  ['Slovakia', 'SK', 'OM', '35', 48.7, 19.5, 140, 3],
  ['Hungary', 'HU', 'HA', '13578', 47.2, 19.4, 150, 5],
  ['Slovenia', 'SI', 'S5', '0137', 46.1, 14.8, 80, 5],
  ['Croatia', 'HR', '9A', '123', 45.4, 16.2, 160, 4],
  ['Serbia', 'RS', 'YU', '127', 44.2, 20.8, 150, 4],
  ['Romania', 'RO', 'YO', '2345689', 45.8, 25, 240, 5],
  ['Bulgaria', 'BG', 'LZ', '125', 42.7, 25.3, 170, 4],
  ['Greece', 'GR', 'SV', '128', 39, 22.4, 220, 3],
  ['Lithuania', 'LT', 'LY', '123', 55.3, 23.9, 130, 5],
  ['Latvia', 'LV', 'YL', '23', 56.9, 24.9, 140, 3],
  ['Estonia', 'EE', 'ES', '1235', 58.7, 25.5, 120, 4],
  ['Belarus', 'BY', 'EU', '134678', 53.5, 28, 230, 3],
  ['Ukraine', 'UA', 'UR UT', '3457', 49, 31.4, 400, 10],
  ['Turkey', 'TR', 'TA', '1234', 39.2, 34, 420, 2],
  ['Russia 1', 'RU', 'UA RA', '1', 61, 34, 420, 4],
  ['Russia 3', 'RU', 'UA RK', '3', 54.8, 38.4, 320, 7],
  ['Russia 4', 'RU', 'UA RW', '4', 53.5, 48.5, 330, 4],
  ['Russia 6', 'RU', 'UA RV', '6', 45.8, 41.4, 330, 3],
  ['Russia 9', 'RU', 'UA RT', '9', 56, 68, 900, 6],
  ['Russia 0', 'RU', 'UA RU', '0', 56, 118, 1300, 3],
  // Asia
  ['Kazakhstan', 'KZ', 'UN', '7', 48.5, 67, 800, 2],
  ['Cyprus', 'CY', '5B', '4', 35, 33.2, 60, 2],
  ['Israel', 'IL', '4X', '146', 31.8, 35, 100, 2],
  ['Kuwait', 'KW', '9K', '2', 29.3, 47.8, 60, 1],
  ['United Arab Emirates', 'AE', 'A6', '14', 24.4, 54.6, 130, 1],
  ['India', 'IN', 'VU', '2', 21, 78, 850, 2],
  ['Thailand', 'TH', 'HS', '1258', 15, 101, 350, 1],
  ['Malaysia', 'MY', '9M', '24', 4, 102.2, 200, 1],
  ['Indonesia', 'ID', 'YB', '0123', -7, 109.5, 500, 2],
  ['Philippines', 'PH', 'DU', '1237', 13, 122, 400, 1],
  ['China 1', 'CN', 'BG', '1', 39.9, 116.4, 60, 1],
  ['China 4', 'CN', 'BG', '4', 33.2, 118.6, 320, 2],
  ['China 7', 'CN', 'BG', '7', 25.6, 112.6, 350, 1],
  ['Korea', 'KR', 'HL', '125', 36.5, 127.8, 150, 2],
  ['Japan 1', 'JP', 'JA JH', '1', 35.8, 139.6, 100, 4],
  ['Japan 3', 'JP', 'JA JH', '3', 34.7, 135.5, 90, 2],
  ['Japan 6', 'JP', 'JA JH', '6', 32.5, 130.8, 170, 2],
  ['Japan 7', 'JP', 'JA JH', '7', 39, 140.8, 170, 2],
  ['Japan 8', 'JP', 'JA JH', '8', 43.4, 142.6, 170, 1],
  // Africa
  ['Morocco', 'MA', 'CN', '8', 32.5, -6.4, 280, 2],
  ['Algeria', 'DZ', '7X', '2', 35.5, 3, 300, 1],
  ['Tunisia', 'TN', '3V', '8', 35.4, 9.8, 180, 1],
  ['Egypt', 'EG', 'SU', '1', 29.4, 31, 200, 1],
  ['Senegal', 'SN', '6W', '7', 14.6, -16, 180, 1],
  ['Ghana', 'GH', '9G', '5', 6.6, -1, 180, 1],
  ['Kenya', 'KE', '5Z', '4', -0.6, 37, 220, 1],
  ['Namibia', 'NA', 'V5', '1', -22.4, 17, 350, 1],
  ['South Africa', 'ZA', 'ZS', '1256', -29, 25, 550, 3],
  // The Americas
  ['United States 1', 'US', 'W K N', '1', 43.4, -71.4, 230, 12],
  ['United States 2', 'US', 'W K N', '2', 42.2, -74.8, 230, 8],
  ['United States 3', 'US', 'W K N', '3', 40.3, -76.9, 190, 9],
  ['United States 4', 'US', 'W K N', '4', 34.4, -82.6, 550, 13],
  ['United States 5', 'US', 'W K N', '5', 33, -96.6, 550, 7],
  ['United States 6', 'US', 'W K N', '6', 36.8, -120, 350, 4],
  ['United States 7', 'US', 'W K N', '7', 43.6, -114.6, 700, 5],
  ['United States 8', 'US', 'W K N', '8', 41, -82.6, 250, 9],
  ['United States 9', 'US', 'W K N', '9', 41.4, -88.2, 280, 7],
  ['United States 0', 'US', 'W K N', '0', 41.6, -97.4, 550, 7],
  ['Canada 1', 'CA', 'VE', '1', 45.1, -63.2, 150, 3],
  ['Canada 2', 'CA', 'VE', '2', 46.6, -72.4, 250, 3],
  ['Canada 3', 'CA', 'VE', '3', 44.6, -79.2, 280, 5],
  ['Canada 6', 'CA', 'VE', '6', 52.2, -113.8, 260, 1],
  ['Canada 7', 'CA', 'VE', '7', 50.2, -122, 300, 2],
  ['Mexico', 'MX', 'XE', '123', 22, -101, 600, 2],
  ['Cuba', 'CU', 'CO', '238', 22, -79.6, 320, 2],
  ['Jamaica', 'JM', '6Y', '5', 18.1, -77.3, 70, 1],
  ['Barbados', 'BB', '8P', '6', 13.2, -59.5, 20, 1],
  ['Trinidad and Tobago', 'TT', '9Y', '4', 10.5, -61.3, 50, 1],
  ['Venezuela', 'VE', 'YV', '145', 9.4, -67.6, 300, 2],
  ['Colombia', 'CO', 'HK', '136', 5.4, -74.4, 350, 1],
  ['Peru', 'PE', 'OA', '4', -11.4, -76.4, 200, 1],
  ['Brazil 2', 'BR', 'PY', '2', -22.6, -48.2, 300, 3],
  ['Brazil 5', 'BR', 'PY', '5', -26, -50.6, 220, 1],
  ['Brazil 7', 'BR', 'PY', '7', -7.6, -36.6, 250, 1],
  ['Argentina', 'AR', 'LU', '12567', -34.6, -60.4, 350, 2],
  ['Chile', 'CL', 'CE', '3', -33.2, -70.8, 120, 1],
  ['Uruguay', 'UY', 'CX', '257', -33.6, -56, 180, 1],
  // Oceania
  ['Australia 2', 'AU', 'VK', '2', -32.6, 149.4, 330, 1],
  ['Australia 3', 'AU', 'VK', '3', -37.2, 144.8, 190, 2],
  ['Australia 6', 'AU', 'VK', '6', -32, 116.4, 180, 2],
  ['New Zealand', 'NZ', 'ZL', '1234', -40.4, 174.6, 380, 2],
];

export const stationAreas: readonly StationArea[] = rows.map(
  ([name, country, prefixes, digits, latitude, longitude, radiusKm, weight]) => ({
    name,
    country,
    prefixes: prefixes.split(' '),
    digits,
    latitude,
    longitude,
    radiusKm,
    weight,
  }),
);
