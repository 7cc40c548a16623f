import { comparesAntennas } from './selection.ts';
import type { LadderUnits } from './selection.ts';

/** In how many nights, and of how many stations, units were made. */
export interface Breadth {
  nights: number;
  stations: number;
}

export interface MeasuredBreadth {
  /** Units that compare antennas, and their (call sign, night)s. */
  units: number;
  clusterCount: number;
  all: Breadth;
  ofAntenna: (id: number) => Breadth;
  /** The antennas in either order. */
  ofPair: (a: number, b: number) => Breadth;
  unitsOfStation: number[];
  /** A number for each unit's (call sign, night): what is not independent shares it. */
  clusters: Int32Array;
}

/** Flags of the nights and stations of one pair. */
interface Seen {
  a: number;
  b: number;
  nights: Uint8Array;
  stations: Uint8Array;
}

const breadthOf = (seen: readonly Seen[]): Breadth => {
  const count = (flags: (own: Seen) => Uint8Array) => {
    const [first, ...others] = seen.map(flags);
    return first
      ? first.reduce((sum, flag, i) => sum + (flag || others.some((own) => own[i]) ? 1 : 0), 0)
      : 0;
  };
  return { nights: count((own) => own.nights), stations: count((own) => own.stations) };
};

/** Nights and stations of each antenna, of each pair and of all units. O(units). */
export function measureBreadth(units: LadderUnits): MeasuredBreadth {
  const { n, antennaA, antennaB } = units;
  const nights = denseNumbers(units.night);
  const stations = denseNumbers(units.call);
  const unitsOfStation = new Array<number>(stations.count).fill(0);
  const pairs = new Map<string, Seen>();
  const nameOf = (a: number, b: number) => `${Math.min(a, b)} ${Math.max(a, b)}`;
  let pair: Seen | undefined;
  for (let i = 0; i < n; i++) {
    if (!comparesAntennas(units, i)) continue;
    const a = antennaA[i]!;
    const b = antennaB[i]!;
    // Units of one pair stand together: look it up where the pair changes only.
    if (!pair || pair.a !== a || pair.b !== b) {
      pair = pairs.get(nameOf(a, b));
      if (!pair) {
        pair = { a, b, nights: new Uint8Array(nights.count), stations: new Uint8Array(stations.count) };
        pairs.set(nameOf(a, b), pair);
      }
    }
    pair.nights[nights.numbers[i]!] = 1;
    pair.stations[stations.numbers[i]!] = 1;
    unitsOfStation[stations.numbers[i]!]!++;
  }
  const every = [...pairs.values()];
  // Millions of calls over a year fit; a map of texts would take longer than the fit itself.
  const clusters = stations.numbers.map((station, i) => station * nights.count + nights.numbers[i]!);
  const compared = clusters.filter((_, i) => comparesAntennas(units, i));
  return {
    units: compared.length,
    clusterCount: new Set(compared).size,
    all: breadthOf(every),
    ofAntenna: (id) => breadthOf(every.filter(({ a, b }) => a === id || b === id)),
    ofPair: (a, b) => breadthOf([pairs.get(nameOf(a, b))].filter((own) => own !== undefined)),
    unitsOfStation: unitsOfStation.filter((count) => count > 0),
    clusters,
  };
}

/** Numbers 0, 1, ... for the values of a column in the order of their coming. */
function denseNumbers(values: Int32Array): { numbers: Int32Array; count: number } {
  const known = new Map<number, number>();
  const numbers = values.map((value) => {
    const number = known.get(value) ?? known.size;
    known.set(value, number);
    return number;
  });
  return { numbers, count: known.size };
}
