/** What the tables of call areas and territories are made of. */

export interface CallArea {
  /** Matches the beginning of a location: a call at home ("W4QUG"), or the prefix visited ("W4", "VP2E"). */
  pattern: RegExp;
  /** Named as on a map: "Ontario", "Canary Islands". */
  area: string;
  /** ISO 3166-1 alpha-2 code of the territory when it differs from the holder of the series. */
  country: string | null;
  /** Centre and radius of uncertainty; null: take the territory's own from the country table. */
  place: { latitude: number; longitude: number; radiusKm: number } | null;
  /** Why no position can be told although the prefix is known. */
  unplaced: string | null;
}

type Spot = readonly [area: string, latitude: number, longitude: number, radiusKm: number];

function starting(pattern: string): RegExp {
  return new RegExp(`^(?:${pattern})`);
}

export function area(
  pattern: string,
  name: string,
  latitude: number,
  longitude: number,
  radiusKm: number,
  country: string | null = null,
): CallArea {
  return {
    pattern: starting(pattern),
    area: name,
    country,
    place: { latitude, longitude, radiusKm },
    unplaced: null,
  };
}

/** A prefix that stands for another entry of the country table. */
export function territory(pattern: string, name: string, country: string): CallArea {
  return { pattern: starting(pattern), area: name, country, place: null, unplaced: null };
}

export function unplaced(pattern: string, name: string, reason: string): CallArea {
  return { pattern: starting(pattern), area: name, country: null, place: null, unplaced: reason };
}

/**
 * Call areas by the digit behind one of a set of prefixes. A second digit makes it a special call
 * (W100QRA), whose first digit says nothing about the area: those fall through to the whole country.
 */
export function byDigit(prefixes: string, areas: Readonly<Record<string, Spot>>): CallArea[] {
  return Object.entries(areas).map(([digit, spot]) => area(`(?:${prefixes})${digit}(?!\\d)`, ...spot));
}

/** Call areas by the first letter of the suffix, behind one of a set of prefixes and one of a set of digits. */
export function byLetter(
  prefixes: string,
  digits: string,
  areas: Readonly<Record<string, Spot>>,
): CallArea[] {
  return Object.entries(areas).map(([letters, spot]) =>
    area(`(?:${prefixes})[${digits}][${letters}]`, ...spot),
  );
}
