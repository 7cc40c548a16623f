import type { ComparisonAnswer, VerdictCode } from '../contracts/comparison.ts';
import { clusterIds, clusterRegression, equivalence, verdict } from '../stats/index.ts';
import type { Coefficient, EquivalenceResult } from '../stats/index.ts';
import { clusterKeys } from './fairness.ts';
import type { ComparisonInput } from './input.ts';
import { offsetColumns, withoutOffsets } from './offsets.ts';
import type { OffsetColumn } from './offsets.ts';
import { keepUnits, selectUnits } from './selection.ts';
import type { SelectedUnits } from './selection.ts';
import { explainTangle, verdictSentence } from './wording.ts';

/** What only the caller knows: which units are ready. Filled in by the server. */
export type ComparisonResult = Omit<ComparisonAnswer, 'preparation'>;

/** The estimate and its verdict, without the pictures: what a screen that asks many questions at once needs. */
export interface ComparisonEstimate {
  verdict: ComparisonResult['verdict'];
  estimate: ComparisonResult['estimate'];
  counts: ComparisonResult['counts'];
}

export interface Fitted extends ComparisonEstimate {
  selected: SelectedUnits;
  leftOut: ReturnType<typeof selectUnits>['leftOut'];
  offsets: OffsetColumn[];
  clusters: Int32Array;
  separable: boolean;
  coefficients: readonly Coefficient[];
  /** Of the estimate, with station-nights as the only clusters; null where there is none. */
  oneWaySeDb: number | null;
  /** Differences with the receiver offsets taken out, as far as they are known. */
  correctedDb: Float64Array;
  test: EquivalenceResult | null;
}

/** Other choices than the usual ones, for seeing how much they matter. */
export interface FitOptions {
  /** This many stations with most units are left out. */
  withoutHeaviest?: number;
  /** Every station counts the same, however many units it has. */
  equalStations?: boolean;
}

/** The regression of 2.4, item 1, its equivalence test and the verdict in words. */
export function fitComparison(input: ComparisonInput, options: FitOptions = {}): Fitted {
  const { question, antennas, marginDb } = input;
  const { units: asked, leftOut } = selectUnits(input);
  const units = options.withoutHeaviest ? dropHeaviest(asked, options.withoutHeaviest) : asked;
  const offsets = offsetColumns(units);
  const { ids: clusters, count: clusterCount } = clusterIds(clusterKeys(units));
  const fit =
    units.n === 0
      ? null
      : clusterRegression(
          { cells: new Int32Array(units.n), cellCount: 1, columns: offsets.map((o) => o.values) },
          units.differenceDb,
          clusters,
          {
            ...(options.equalStations ? { weights: stationWeights(units) } : {}),
            ...(question.clustering === 'two-way'
              ? { secondClusters: clusterIds(Array.from(units.night)).ids }
              : {}),
          },
        );
  const theta = fit?.coefficients[0] ?? null;
  const separable = theta === null || theta.reason !== 'cannot-be-separated';
  const test = fit && theta?.estimable ? equivalenceOf(theta, fit.df, marginDb) : null;
  const estimate = fit && theta && test ? estimateOf(theta, fit.df, test.interval) : null;
  const counts = countsOf(units, clusterCount);
  const decided = verdict({
    estimate: theta?.estimate ?? null,
    interval: estimate?.interval95Db ?? null,
    interval90: estimate?.interval90Db ?? null,
    clusters: counts.clusters,
    nights: counts.nights,
    margin: marginDb,
    separable,
  });
  const code = decided.code.replaceAll('-', ' ') as VerdictCode;
  const receiver = (id: number) => input.receivers.find((r) => r.id === id)?.callSign ?? `receiver ${id}`;
  const { tangle, cures } = separable
    ? { tangle: '', cures: [] }
    : explainTangle(units, { a: antennas.a.name, b: antennas.b.name, receiver });
  const { sectorCount } = input;
  const names = { nameA: antennas.a.name, nameB: antennas.b.name };
  const sentence = verdictSentence({
    code,
    ...names,
    question,
    sectorCount,
    estimate,
    counts,
    marginDb,
    tangle,
  });
  return {
    verdict: { code, sentence, cures },
    estimate,
    counts,
    selected: units,
    leftOut,
    offsets,
    clusters,
    separable,
    coefficients: fit?.coefficients ?? [],
    oneWaySeDb: fit && estimate ? Math.sqrt((fit.oneWayCovariances[0] ?? fit.covariance)![0]!) : null,
    correctedDb:
      separable && fit ? withoutOffsets(units, offsets, fit.solution.subarray(1)) : units.differenceDb,
    test,
  };
}

/** Only the verdict; several hundred a second where an hour of one band is asked for. */
export function estimateComparison(input: ComparisonInput, options: FitOptions = {}): ComparisonEstimate {
  const { verdict: decided, estimate, counts } = fitComparison(input, options);
  return { verdict: decided, estimate, counts };
}

function equivalenceOf(theta: Coefficient, df: number, margin: number): EquivalenceResult | null {
  return theta.estimate === null
    ? null
    : equivalence({ estimate: theta.estimate, se: theta.se, df }, { margin });
}

function estimateOf(
  theta: Coefficient,
  df: number,
  interval90: readonly [number, number] | null,
): ComparisonResult['estimate'] {
  if (theta.estimate === null || theta.se === null || theta.interval === null || interval90 === null)
    return null;
  return {
    estimateDb: theta.estimate,
    seDb: theta.se,
    df,
    interval95Db: [theta.interval[0], theta.interval[1]],
    interval90Db: [interval90[0], interval90[1]],
    p: theta.p ?? 1,
    designEffect: theta.designEffect,
  };
}

function countsOf(units: SelectedUnits, clusters: number): ComparisonResult['counts'] {
  let matches = 0;
  let alternating = 0;
  for (let i = 0; i < units.n; i++) {
    if (units.alternating[i] === 1) alternating++;
    else matches += units.countA[i]!;
  }
  const stations = new Set(units.call).size;
  const nights = new Set(units.night).size;
  return {
    units: units.n,
    matches,
    clusters,
    stations,
    nights,
    simultaneous: units.n - alternating,
    alternating,
  };
}

function dropHeaviest(units: SelectedUnits, stations: number): SelectedUnits {
  const counts = unitsPerCall(units);
  const heaviest = new Set(
    [...counts]
      .sort(([p, a], [q, b]) => b - a || p - q)
      .slice(0, stations)
      .map(([call]) => call),
  );
  return keepUnits(units, (i) => !heaviest.has(units.call[i]!));
}

function stationWeights(units: SelectedUnits): Float64Array {
  const counts = unitsPerCall(units);
  return Float64Array.from(units.call, (call) => 1 / counts.get(call)!);
}

function unitsPerCall({ call }: SelectedUnits): Map<number, number> {
  const counts = new Map<number, number>();
  for (const id of call) counts.set(id, (counts.get(id) ?? 0) + 1);
  return counts;
}
