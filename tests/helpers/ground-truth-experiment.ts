import { bySector, comparisonCells } from '../../shared/comparison/cells.ts';
import { censoredView, type CensoredOutcome } from '../../shared/comparison/censored.ts';
import { fitComparison, type Fitted } from '../../shared/comparison/fit.ts';
import {
  answerComparison,
  type CallFacts,
  type ComparisonEstimate,
  type ComparisonInput,
  type ComparisonResult,
} from '../../shared/comparison/index.ts';
import { poolCells, pooledPictures } from '../../shared/comparison/pooling.ts';
import { peekProofLine } from '../../shared/comparison/peek-proof.ts';
import {
  comparisonQuestion,
  type ComparisonCell,
  type ComparisonQuestionInput,
} from '../../shared/contracts/comparison.ts';
import {
  pairSpots,
  STANDING_RULES,
  type HeardOnlyColumns,
  type PairingResult,
  type UnitColumns,
} from '../../shared/pairing/index.ts';
import { selectHeardOnly } from '../../shared/comparison/heard-only-selection.ts';
import { nightEndMs } from '../../shared/radio/night.ts';
import { clusterIds, ladder, type LadderResult, type Random } from '../../shared/stats/index.ts';
import { dayMs, firstNight, liveThrough, place, type Season, type World } from './ground-truth-world.ts';

export const marginDb = 1;

/** The same units taken as independent and the receivers as equal: what not to do. */
export interface Naive {
  estimateDb: number;
  seDb: number;
  interval95Db: [number, number];
  /** The 90 % interval lies inside the margin. */
  equivalent: boolean;
}

/** What was known when a night was over, all data so far put together again. */
export interface Peek {
  peekProofDb: readonly [number, number] | null;
  /** The fixed 95 % intervals, ours and the naive one; null before a verdict may speak. */
  fixedDb: readonly [number, number] | null;
  naiveDb: readonly [number, number] | null;
}

export interface Experiment {
  season: Season;
  /** Verdict and estimate, as in the answer. */
  estimate: ComparisonEstimate;
  /** With the stations that one antenna alone heard. */
  censored(): CensoredOutcome;
  /** The answer's sectors, raw and pooled. */
  sectors(): ComparisonCell[];
  /** With all panels, of which the exact rank test takes most of the time. */
  answer(): ComparisonResult;
  naive: Naive;
  /** Lasting difference of the stations compared, a station counting as often as it made a unit. */
  lastingOfComparedDb: number;
  /** Asks about the first 1, 2, 3 ... nights, as someone who looks every morning. */
  peeks(): Peek[];
  /** All antennas on one scale, with the rows taken as independent beside it. */
  ladder(): { ours: LadderResult; naive: LadderResult };
}

/** One experiment from spots to answer, by the program's own pairing and comparison of antennas 1 and 2. */
export function runExperiment(
  world: World,
  random: Random,
  change: Partial<ComparisonQuestionInput> = {},
): Experiment {
  const season = liveThrough(world, random);
  const window = { startMs: firstNight * dayMs, endMs: (firstNight + world.nights + 1) * dayMs };
  const paired = pairSpots(season.spots, season.dwells, STANDING_RULES, window);
  const input = inputOf(world, season, paired, change);
  const fitted = fitComparison(input);
  const { call, differenceDb } = fitted.selected;
  let lastingDb = 0;
  for (const id of call) lastingDb += season.stations[id]!.lastingDb / call.length;

  return {
    season,
    estimate: fitted,
    naive: naiveOf(differenceDb),
    lastingOfComparedDb: lastingDb,
    censored: once(() => censoredView(input, fitted, selectHeardOnly(input))),
    sectors: once(() => {
      const { selected, rows, offsets, clusters } = fitted;
      const cells = comparisonCells(selected, rows, offsets, clusters, bySector, input.question.clustering);
      poolCells(cells, pooledPictures.sectors);
      return cells.map(({ cell }) => cell);
    }),
    answer: once(() => answerComparison(input)),
    peeks: once(() =>
      Array.from({ length: world.nights }, (_, night) => {
        const endMinute = nightEndMs(firstNight + night, place.longitude) / 60_000;
        const { blockMinute } = input.units;
        const units = where(input.units, (i) => blockMinute[i]! < endMinute);
        return peekAt(fitComparison({ ...input, units }));
      }),
    ),
    ladder: once(() => ladders(paired.units)),
  };
}

/** Worked out when first asked for. */
function once<T>(make: () => T): () => T {
  let made: { value: T } | null = null;
  return () => (made ??= { value: make() }).value;
}

function inputOf(
  world: World,
  season: Season,
  paired: PairingResult,
  change: Partial<ComparisonQuestionInput>,
): ComparisonInput {
  const isAsked = (columns: UnitColumns | HeardOnlyColumns) => (i: number) =>
    columns.antennaA[i] === 1 && columns.antennaB[i] === 2;
  const calls = season.stations.map(({ azimuthDeg }, id): [number, CallFacts] => [
    id,
    { call: `station ${id}`, country: null, azimuthDeg, spreadDeg: 0, distanceKm: null },
  ]);
  return {
    question: comparisonQuestion.parse({ antennaA: 1, antennaB: 2, ...change }),
    antennas: {
      a: { id: 1, name: 'Antenna A', marker: 'A', headingDeg: null },
      b: { id: 2, name: 'Antenna B', marker: 'B', headingDeg: null },
    },
    receivers: world.offsetsDb.map((_, index) => ({ id: index + 1, callSign: `receiver ${index + 1}` })),
    rules: { ...STANDING_RULES, blockMinutes: 15 },
    ...{ marginDb, sectorCount: 12, station: place, calls: new Map(calls) },
    units: where(paired.units, isAsked(paired.units)),
    heardOnly: where(paired.heardOnly, isAsked(paired.heardOnly)),
    nights: [{ spots: paired.tallies, doubles: paired.doubles, levels: paired.levels, listening: [] }],
  };
}

function where<T extends UnitColumns | HeardOnlyColumns>(columns: T, wanted: (i: number) => boolean): T {
  const rows: number[] = [];
  for (let i = 0; i < columns.call.length; i++) if (wanted(i)) rows.push(i);
  const picked = Object.entries(columns).map(([name, values]) => {
    const column = values as Int32Array;
    const Kind = column.constructor as new (length: number) => Int32Array;
    const kept = new Kind(rows.length);
    for (let k = 0; k < rows.length; k++) kept[k] = column[rows[k]!]!;
    return [name, kept];
  });
  return Object.fromEntries(picked) as T;
}

function naiveOf(differenceDb: Float64Array): Naive {
  const n = differenceDb.length;
  let estimateDb = 0;
  for (const d of differenceDb) estimateDb += d / n;
  let squares = 0;
  for (const d of differenceDb) squares += (d - estimateDb) ** 2;
  const seDb = Math.sqrt(squares / (n - 1) / n);
  // Hundreds of units: the t distribution's quantiles are the normal ones.
  const within = (quantile: number): [number, number] => [
    estimateDb - quantile * seDb,
    estimateDb + quantile * seDb,
  ];
  const [lo90, hi90] = within(1.645);
  return { estimateDb, seDb, interval95Db: within(1.96), equivalent: lo90 > -marginDb && hi90 < marginDb };
}

function peekAt({ verdict, estimate, selected, correctedDb, clusters, counts }: Fitted): Peek {
  const names = { a: 'Antenna A', b: 'Antenna B' };
  const line = peekProofLine(selected, correctedDb, clusters, counts.clusters, names);
  const may = verdict.code !== 'not enough yet';
  return {
    peekProofDb: line?.points.at(-1)!.intervalDb ?? null,
    fixedDb: may ? (estimate?.interval95Db ?? null) : null,
    naiveDb: may ? naiveOf(selected.differenceDb).interval95Db : null,
  };
}

/** A station's night, as one number. */
function stationNights(units: UnitColumns): number[] {
  return Array.from(
    units.call,
    (call, i) => call * 1_000_000 + Math.floor((units.blockMinute[i]! * 60_000) / dayMs),
  );
}

function ladders(units: UnitColumns): { ours: LadderResult; naive: LadderResult } {
  const { antennaA, antennaB, receiverA, receiverB, differenceDb: difference } = units;
  const rows = { antennaA, antennaB, receiverA, receiverB, difference };
  const equal = new Int32Array(difference.length).fill(1);
  return {
    ours: ladder({ ...rows, clusters: clusterIds(stationNights(units)).ids }, { draws: 1 }),
    naive: ladder(
      { ...rows, receiverA: equal, receiverB: equal, clusters: difference.map((_, i) => i) },
      { draws: 1 },
    ),
  };
}
