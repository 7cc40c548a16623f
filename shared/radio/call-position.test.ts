import countries from 'world-countries';
import { describe, expect, it } from 'vitest';
import { bearingSpreadDeg, pathTo } from './geodesic.ts';
import { parseCallSign, type CallSign } from './call-sign.ts';
import {
  checkOverride,
  compileOverrides,
  positionOfCall,
  type CallPosition,
  type CompiledOverrides,
  type PositionOverride,
} from './call-position.ts';
import { CALL_AREAS } from './data/call-areas.ts';
import { CALL_SIGN_SERIES } from './data/call-sign-series.ts';
import { CALL_TERRITORIES } from './data/call-territories.ts';
import { ISLAND_SPREAD_KM } from './data/country-spread.ts';
import { isRefusal } from './place.ts';

function callOf(text: string): CallSign {
  const call = parseCallSign(text);
  if (isRefusal(call)) throw new Error(call.reason);
  return call;
}

function positionOf(text: string, overrides?: CompiledOverrides): CallPosition {
  const position = positionOfCall(callOf(text), overrides);
  if (isRefusal(position)) throw new Error(position.reason);
  return position;
}

function reasonOf(text: string, overrides?: CompiledOverrides): string {
  const position = positionOfCall(callOf(text), overrides);
  return isRefusal(position) ? position.reason : 'placed';
}

describe('positions of calls', () => {
  // Coordinates of cities from an atlas; each lies in the area its call names by common practice in the trade.
  it.each([
    ['W1QSA', 'Boston', 42.36, -71.06],
    ['K2QSA', 'New York', 40.71, -74.01],
    ['N3QSA', 'Philadelphia', 39.95, -75.17],
    ['AA4QSA', 'Atlanta', 33.75, -84.39],
    ['W5QSA', 'Dallas', 32.78, -96.8],
    ['K6QSA', 'San Francisco', 37.77, -122.42],
    ['K7QSA', 'Salt Lake City', 40.76, -111.89],
    ['KB8QSA', 'Columbus', 39.96, -83],
    ['W9QSA', 'Chicago', 41.88, -87.63],
    ['WA0QSA', 'Omaha', 41.26, -95.93],
    ['KL7QSA', 'Anchorage', 61.22, -149.9],
    ['KH6QSA', 'Honolulu', 21.31, -157.86],
    ['VE1QSA', 'Halifax', 44.65, -63.57],
    ['VA2QSA', 'Montreal', 45.5, -73.57],
    ['VE3QSA', 'Toronto', 43.65, -79.38],
    ['VE4QSA', 'Winnipeg', 49.9, -97.14],
    ['VE5QSA', 'Regina', 50.45, -104.62],
    ['VE6QSA', 'Calgary', 51.05, -114.07],
    ['VE7QSA', 'Vancouver', 49.28, -123.12],
    ['VO1QSA', "St. John's", 47.56, -52.71],
    ['VY1QSA', 'Whitehorse', 60.72, -135.06],
    ['R1QSA', 'Saint Petersburg', 59.94, 30.31],
    ['UA2FQSA', 'Kaliningrad', 54.71, 20.51],
    ['RA3QSA', 'Moscow', 55.76, 37.62],
    ['UA4QSA', 'Samara', 53.2, 50.15],
    ['RU6QSA', 'Krasnodar', 45.04, 38.98],
    ['UA9OQSA', 'Novosibirsk', 55.01, 82.93],
    ['RA9CQSA', 'Yekaterinburg', 56.84, 60.65],
    ['UA0SQSA', 'Irkutsk', 52.29, 104.28],
    ['RA0LQSA', 'Vladivostok', 43.12, 131.89],
    ['VK2QSA', 'Sydney', -33.87, 151.21],
    ['VK3QSA', 'Melbourne', -37.81, 144.96],
    ['VK4QSA', 'Brisbane', -27.47, 153.03],
    ['VK5QSA', 'Adelaide', -34.93, 138.6],
    ['VK6QSA', 'Perth', -31.95, 115.86],
    ['ZL1QSA', 'Auckland', -36.85, 174.76],
    ['ZL2QSA', 'Wellington', -41.29, 174.78],
    ['ZL3QSA', 'Christchurch', -43.53, 172.64],
    ['PY1QSA', 'Rio de Janeiro', -22.91, -43.17],
    ['PY2QSA', 'São Paulo', -23.55, -46.63],
    ['PY3QSA', 'Porto Alegre', -30.03, -51.22],
    ['PY7QSA', 'Recife', -8.05, -34.88],
    ['PP8QSA', 'Manaus', -3.12, -60.02],
    ['BY1QSA', 'Beijing', 39.9, 116.41],
    ['BG4QSA', 'Shanghai', 31.23, 121.47],
    ['BD7QSA', 'Guangzhou', 23.13, 113.26],
    ['BG0QSA', 'Urumqi', 43.83, 87.62],
    ['BV2QSA', 'Taipei', 25.03, 121.57],
    ['VR2QSA', 'Hong Kong', 22.32, 114.17],
    ['JA1QSA', 'Tokyo', 35.68, 139.69],
    ['JA3QSA', 'Osaka', 34.69, 135.5],
    ['JA6QSA', 'Fukuoka', 33.59, 130.4],
    ['JA8QSA', 'Sapporo', 43.06, 141.35],
    ['LU1AQSA', 'Buenos Aires', -34.6, -58.38],
    ['LU5HQSA', 'Córdoba', -31.42, -64.18],
    ['YB0QSA', 'Jakarta', -6.2, 106.85],
    ['YB6QSA', 'Medan', 3.6, 98.67],
    ['UN7GQSA', 'Almaty', 43.24, 76.89],
    ['CE3QSA', 'Santiago', -33.45, -70.67],
    ['CE8QSA', 'Punta Arenas', -53.16, -70.91],
    ['VU2QSA', 'Delhi', 28.61, 77.21],
    ['EA8QSA', 'Las Palmas', 28.12, -15.43],
    ['EA6QSA', 'Palma', 39.57, 2.65],
    ['CU2QSA', 'Ponta Delgada', 37.74, -25.67],
    ['CT3QSA', 'Funchal', 32.65, -16.91],
    ['KP4QSA', 'San Juan', 18.47, -66.11],
    ['IT9QSA', 'Palermo', 38.12, 13.36],
    ['IS0QSA', 'Cagliari', 39.22, 9.12],
    ['SV9QSA', 'Heraklion', 35.34, 25.14],
    ['GM3QSA', 'Edinburgh', 55.95, -3.19],
    ['GW3QSA', 'Cardiff', 51.48, -3.18],
    ['GI3QSA', 'Belfast', 54.6, -5.93],
    ['MM0QSA', 'Glasgow', 55.86, -4.25],
    ['G3QSA', 'London', 51.51, -0.13],
    ['OH0QSA', 'Mariehamn', 60.1, 19.94],
    ['OY1QSA', 'Tórshavn', 62.01, -6.77],
    ['ZS1QSA', 'Cape Town', -33.92, 18.42],
    ['ZS6QSA', 'Johannesburg', -26.2, 28.05],
    ['9M6QSA', 'Kota Kinabalu', 5.98, 116.07],
    ['HB0QSA', 'Vaduz', 47.14, 9.52],
    ['4X4QSA', 'Tel Aviv', 32.08, 34.78],
    ['EI7QSA', 'Galway', 53.27, -9.05],
    ['DL2QSA', 'Hamburg', 53.55, 9.99],
    ['3D2QSA', 'Suva', -18.14, 178.44],
    ['3DA0QSA', 'Mbabane', -26.31, 31.14],
    ['Z61QSA', 'Pristina', 42.66, 21.17],
  ])('puts the circle of %s round %s', (call, _city, latitude, longitude) => {
    const position = positionOf(call);
    // A circle as large as an area of another shape leaves its corners out: half as far again is allowed.
    expect(pathTo(position, { latitude, longitude }).distanceKm).toBeLessThan(position.radiusKm * 1.5 + 20);
  });

  it.each([
    ['EI7QSB', 'country', 'Ireland', null],
    ['EA8QSH', 'call-area', 'Spain', 'Canary Islands'],
    ['K1QRK/4', 'call-area', 'United States', 'South-eastern states'],
    ['K1QRK/KP2', 'country', 'United States Virgin Islands', null],
    ['VP2E/K1QRK', 'country', 'Anguilla', null],
    ['EA8/EI7QSB/P', 'call-area', 'Spain', 'Canary Islands'],
    ['F/EI7QSB', 'country', 'France', null],
    ['W100QRA', 'country', 'United States', null],
    ['UA9/EI7QSB', 'call-area', 'Russia', 'Urals and western Siberia'],
    ['UA3AQSA/9', 'call-area', 'Russia', 'Urals and western Siberia'],
    ['VK9NQSA', 'country', 'Norfolk Island', null],
  ])('places %s by its %s: %s, %s', (call, source, country, area) => {
    expect(positionOf(call)).toMatchObject({ source, country, area, overridden: false });
  });

  it.each([
    ['EI7QSB/MM', 'EI7QSB/MM is at sea: a maritime mobile station has no bearing.'],
    ['EA8/EI7QSB/AM', 'EA8/EI7QSB/AM is in the air: an aeronautical mobile station has no bearing.'],
    ['TO5QSA', 'TO5QSA cannot be placed: by its prefix it may be any of the French overseas territories.'],
    [
      'C7QSA',
      'C7QSA cannot be placed: its prefix belongs to the World Meteorological Organization, whose stations may be anywhere.',
    ],
    ['T98QSA', 'T98QSA cannot be placed: its prefix is allocated to no country.'],
  ])('says why %s has no position', (call, reason) => {
    expect(reasonOf(call)).toBe(reason);
  });

  it('knows the country of every holder in the table of series', () => {
    const organisations = ['WMO', 'UN', 'ICAO'];
    const known = new Set<string>(countries.map(({ cca2 }) => cca2));
    const holders = [...new Set(CALL_SIGN_SERIES.map(([, , holder]) => holder))];
    expect(holders.filter((holder) => !known.has(holder))).toEqual(organisations);
    // Nearly every one of the ITU's member states (193 in 2023) holds a series of its own.
    expect(holders.length).toBeGreaterThan(190);
    expect(Object.keys(ISLAND_SPREAD_KM).filter((code) => !known.has(code))).toEqual([]);
  });

  it('keeps areas and territories under holders that the table of series knows', () => {
    const holders = new Set<string>([...CALL_SIGN_SERIES.map(([, , holder]) => holder), 'none']);
    const known = new Set<string>(countries.map(({ cca2 }) => cca2));
    for (const table of [CALL_AREAS, CALL_TERRITORIES]) {
      for (const [holder, rows] of Object.entries(table)) {
        expect(holders).toContain(holder);
        for (const { country, place, unplaced } of rows) {
          expect(country === null || known.has(country)).toBe(true);
          expect(place !== null || unplaced !== null || country !== null).toBe(true);
          if (place !== null) {
            expect(Math.abs(place.latitude)).toBeLessThanOrEqual(90);
            expect(Math.abs(place.longitude)).toBeLessThanOrEqual(180);
            expect(place.radiusKm).toBeGreaterThan(0);
          }
        }
      }
    }
  });

  // Land areas from world-countries (ODbL 1.0): the circles of a country's call areas must add up to it.
  it.each<[code: string, territories: string[], doubles: string[]]>([
    ['US', ['Alaska'], []],
    ['CN', [], []],
    ['JP', [], []],
    ['AR', [], []],
    ['ZA', [], []],
    ['KZ', [], []],
    ['BR', [], ['Paraná and Santa Catarina', 'Northern Brazil', 'Mato Grosso and Mato Grosso do Sul']],
  ])('divides %s into areas that add up to the country within 10 %', (code, territories, doubles) => {
    const rows = [
      ...(CALL_AREAS[code] ?? []).filter(({ area }) => !doubles.includes(area)),
      ...(CALL_TERRITORIES[code] ?? []).filter(({ area }) => territories.includes(area)),
    ];
    const circles = new Map(rows.map(({ area, place }) => [area, Math.PI * (place?.radiusKm ?? 0) ** 2]));
    const sum = [...circles.values()].reduce((total, circle) => total + circle, 0);
    const land = countries.find(({ cca2 }) => cca2 === code)?.area ?? 0;
    expect(Math.abs(sum / land - 1)).toBeLessThan(0.1);
  });

  it('lets a station in Ireland use the call areas of wide countries for questions of direction', () => {
    const io53 = { latitude: 53.5, longitude: -9 };
    const spreads = ['W4QUG', 'K1QRK', 'VE3QRN', 'PY2QSU', 'LU4QSV', 'JA7QRR', 'RA0LQSA', 'ZS6QRF'].map(
      (call) => {
        const position = positionOf(call);
        return bearingSpreadDeg(io53, position, position.radiusKm);
      },
    );
    expect(Math.max(...spreads)).toBeLessThan(30);
  });
});

describe("a station's own entries", () => {
  const overrides = compileOverrides([
    { match: 'call', call: 'EA8QSH', locator: 'IL18' },
    { match: 'call', call: 'EI7QSB/P', locator: 'IO63' },
    { match: 'prefix', prefix: 'EI', area: 'West of Ireland', latitude: 53.3, longitude: -9, radiusKm: 40 },
    { match: 'prefix', prefix: 'EI0', area: 'Aran Islands', latitude: 53.1, longitude: -9.7, radiusKm: 15 },
    { match: 'prefix', prefix: 'C7', area: 'Weather ship', latitude: 66, longitude: 2, radiusKm: 20 },
  ]);

  it('believe the locator of a call before everything else', () => {
    expect(positionOf('EA8QSH', overrides)).toMatchObject({
      latitude: 28.5,
      longitude: -17,
      source: 'user-locator',
      country: 'Spain',
      overridden: true,
    });
    expect(positionOf('EI7QSB/P', overrides)).toMatchObject({ latitude: 53.5, longitude: -7 });
  });

  it('keep a locator for the station at home only', () => {
    expect(positionOf('EA8QSH/QRP', overrides).source).toBe('user-locator');
    expect(positionOf('EA8QSH/P', overrides).source).toBe('call-area');
    expect(positionOf('F/EA8QSH', overrides)).toMatchObject({ source: 'country', country: 'France' });
    expect(reasonOf('EA8QSH/MM', overrides)).toMatch(/^EA8QSH\/MM is at sea/);
  });

  it('let the longest prefix win over shorter ones and over the tables', () => {
    expect(positionOf('EI7QSC', overrides)).toMatchObject({
      area: 'West of Ireland',
      radiusKm: 40,
      source: 'call-area',
      country: 'Ireland',
      overridden: true,
    });
    expect(positionOf('EI0QSC', overrides)).toMatchObject({ area: 'Aran Islands' });
    expect(positionOf('EI/EA8QSC', overrides)).toMatchObject({ area: 'West of Ireland' });
    expect(positionOf('C7QSA', overrides)).toMatchObject({ area: 'Weather ship', country: null });
  });

  it.each<[PositionOverride, string]>([
    [
      { match: 'call', call: 'EA8QSH', locator: 'IL' },
      'The locator IL is too coarse for one station; give 4 characters or more.',
    ],
    [
      { match: 'call', call: 'EA8QSH', locator: 'ZZ99' },
      'The first pair of the locator "ZZ99" is "ZZ"; it must be two letters A to R.',
    ],
    [{ match: 'call', call: '', locator: 'IL18' }, 'The call sign is empty; write one such as EI7QSB.'],
    [
      { match: 'prefix', prefix: 'ei', area: '', latitude: 0, longitude: 0, radiusKm: 1 },
      'The prefix "ei" must be 1 to 8 capital letters and digits, such as VE7.',
    ],
    [
      { match: 'prefix', prefix: 'EI', area: '', latitude: 91, longitude: 0, radiusKm: 1 },
      'The position of prefix EI must lie within latitude -90 to 90 and longitude -180 to 180.',
    ],
    [
      { match: 'prefix', prefix: 'EI', area: '', latitude: 0, longitude: 0, radiusKm: -1 },
      'The radius of prefix EI must be 0 to 20000 km.',
    ],
  ])('are refused with a sentence when unfit: %o', (entry, reason) => {
    expect(checkOverride(entry)).toEqual({ reason });
    expect(() => compileOverrides([entry])).toThrow(new RangeError(reason));
  });
});
