import type { ComparisonAnswer, VerdictCode } from '../contracts/comparison.ts';
import { clusterIds, clusterRegression, equivalence, verdict } from '../stats/index.ts';
import type { Coefficient, EquivalenceResult } from '../stats/index.ts';
import { inNoCell, selectCommonAntenna, withCommonAntenna } from './common-antenna.ts';
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
  /** The same, followed by the units of common antennas; `offsets` and `clusters` are over these. */
  rows: SelectedUnits;
  leftOut: ReturnType<typeof selectUnits>['leftOut'];
  offsets: OffsetColumn[];
  clusters: Int32Array;
  separable: boolean;
  coefficients: readonly Coefficient[];
  /** The receivers' offsets, one per column; 0 where the data do not tell them. */
  rho: Float64Array;
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
  const common = selectCommonAntenna(input, units);
  const rows = withCommonAntenna(units, common);
  const offsets = offsetColumns(rows);
  // Units come first, and so do their clusters: the first `clusterCount` are theirs.
  const clusters = clusterIds(clusterKeys(rows)).ids;
  const clusterCount = clusters.subarray(0, units.n).reduce((most, id) => Math.max(most, id + 1), 0);
  const weights = options.equalStations ? { weights: stationWeights(rows) } : {};
  const regress = (ids: Int32Array, secondWay: { secondClusters?: Int32Array }) =>
    clusterRegression(
      {
        cells: inNoCell(new Int32Array(rows.n), units.n),
        cellCount: 1,
        columns: offsets.map((o) => o.values),
      },
      rows.differenceDb,
      ids,
      { ...weights, ...secondWay },
    );
  const oneWay = units.n === 0 ? null : regress(clusters, {});
  let fit = oneWay;
  if (oneWay && question.clustering === 'two-way') {
    const { calls, nights } = twoWays(rows);
    fit = regress(calls, { secondClusters: nights });
  }
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
    rows,
    leftOut,
    offsets,
    clusters,
    separable,
    coefficients: fit?.coefficients ?? [],
    rho: fit?.solution.subarray(1) ?? new Float64Array(0),
    oneWaySeDb: estimate ? (oneWay?.coefficients[0]?.se ?? null) : null,
    correctedDb:
      separable && fit ? withoutOffsets(units, offsets, fit.solution.subarray(1)) : units.differenceDb,
    test,
  };
}

/** The two ways of two-way clusters: call sign, and night (Cameron, Gelbach and Miller 2011). */
export function twoWays(rows: Pick<SelectedUnits, 'call' | 'night'>): {
  calls: Int32Array;
  nights: Int32Array;
} {
  return { calls: clusterIds(Array.from(rows.call)).ids, nights: clusterIds(Array.from(rows.night)).ids };
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
