import type { ComparisonInput } from '../../../shared/comparison/index.ts';
import { comparisonQuestion } from '../../../shared/contracts/comparison.ts';
import { STANDING_RULES, pairSpots } from '../../../shared/pairing/index.ts';
import type { HeardOnlyColumns, UnitColumns } from '../../../shared/pairing/index.ts';
import { loadSampleStation } from './load.ts';

/** As the rules of `expected.json` give it. */
const stationLongitude = -9;

/** Copies the rows of one antenna pair out of all units, as the server reads them. */
function ofPair<T extends UnitColumns | HeardOnlyColumns>(columns: T, a: number, b: number): T {
  const keep = [...columns.antennaA.keys()].filter(
    (i) => columns.antennaA[i] === a && columns.antennaB[i] === b,
  );
  return Object.fromEntries(
    Object.entries(columns).map(([name, values]) => [
      name,
      (values as Int32Array).filter((_v, i) => keep.includes(i)),
    ]),
  ) as unknown as T;
}

/** A question about one of the two data sets, with all that its answer is made of. */
export function askSample(
  set: 'swap' | 'alternate',
  nameA: string,
  nameB: string,
  change: object = {},
): ComparisonInput {
  const sample = loadSampleStation(set);
  const startMs = sample.dwells.startMs.reduce((x, y) => Math.min(x, y)) - 86_400_000;
  const endMs = sample.dwells.endMs.reduce((x, y) => Math.max(x, y)) + 86_400_000;
  const paired = pairSpots(sample.spots, sample.dwells, STANDING_RULES, { startMs, endMs });
  const a = sample.antennaIds.get(nameA)!;
  const b = sample.antennaIds.get(nameB)!;
  const [low, high] = a < b ? [a, b] : [b, a];
  return {
    question: comparisonQuestion.parse({ antennaA: a, antennaB: b, ...change }),
    antennas: {
      a: { id: a, name: nameA, marker: 'A', headingDeg: null },
      b: { id: b, name: nameB, marker: 'B', headingDeg: null },
    },
    receivers: [...sample.receiverIds].map(([callSign, id]) => ({ id, callSign })),
    rules: { ...STANDING_RULES, blockMinutes: 15 },
    marginDb: 1,
    sectorCount: 12,
    station: { latitude: 53.5, longitude: stationLongitude },
    units: ofPair(paired.units, low, high),
    heardOnly: ofPair(paired.heardOnly, low, high),
    calls: new Map(
      sample.calls.map((call, i) => [
        i + 1,
        { call, country: null, azimuthDeg: null, spreadDeg: null, distanceKm: null },
      ]),
    ),
    nights: [{ spots: paired.tallies, doubles: paired.doubles, levels: paired.levels, listening: [] }],
  };
}
