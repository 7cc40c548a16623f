import type { ComparisonAnswer, VerdictCode } from '../contracts/comparison.ts';
import {
  clusterIds,
  clusterRegression,
  equivalence,
  hodgesLehmann,
  pairedT,
  signTest,
  signedRank,
  verdict,
} from '../stats/index.ts';
import type { Coefficient, EquivalenceResult } from '../stats/index.ts';
import { byBandAndHour, byNight, bySector, comparisonCells } from './cells.ts';
import {
  clusterKeys,
  countExclusions,
  halfWeightStations,
  heardOnlyTest,
  listeningHours,
  receiverBalance,
  thinEvidence,
} from './fairness.ts';
import type { ComparisonInput } from './input.ts';
import { offsetColumns, withoutOffsets } from './offsets.ts';
import type { OffsetColumn } from './offsets.ts';
import { selectHeardOnly, selectUnits } from './selection.ts';
import type { SelectedUnits } from './selection.ts';
import { histogram, stationRows } from './stations.ts';
import { explainTangle, verdictSentence } from './wording.ts';

/** What only the caller knows: which units are ready. Filled in by the server. */
export type ComparisonResult = Omit<ComparisonAnswer, 'preparation'>;

/** Rows of the station table that travel to the browser; the CSV has all. */
const mostStationRows = 1000;
/** Means of integers differ by rounding in the last digits: ties are ties to a billionth of a decibel. */
const tieResolutionDb = 1e-9;

/** The estimate and its verdict, without the pictures: what a screen that asks many questions at once needs. */
export interface ComparisonEstimate {
  verdict: ComparisonResult['verdict'];
  estimate: ComparisonResult['estimate'];
  counts: ComparisonResult['counts'];
}

interface Fitted extends ComparisonEstimate {
  selected: SelectedUnits;
  leftOut: ReturnType<typeof selectUnits>['leftOut'];
  offsets: OffsetColumn[];
  clusters: Int32Array;
  separable: boolean;
  coefficients: readonly Coefficient[];
  /** Differences with the receiver offsets taken out, as far as they are known. */
  correctedDb: Float64Array;
  test: EquivalenceResult | null;
}

/** The regression of 2.4, item 1, its equivalence test and the verdict in words. */
function fitComparison(input: ComparisonInput): Fitted {
  const { question, antennas, marginDb } = input;
  const { units, leftOut } = selectUnits(input);
  const offsets = offsetColumns(units);
  const { ids: clusters, count: clusterCount } = clusterIds(clusterKeys(units));
  const fit =
    units.n === 0
      ? null
      : clusterRegression(
          { cells: new Int32Array(units.n), cellCount: 1, columns: offsets.map((o) => o.values) },
          units.differenceDb,
          clusters,
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
    correctedDb:
      separable && fit ? withoutOffsets(units, offsets, fit.solution.subarray(1)) : units.differenceDb,
    test,
  };
}

/** Only the verdict; several hundred a second where an hour of one band is asked for. */
export function estimateComparison(input: ComparisonInput): ComparisonEstimate {
  const { verdict: decided, estimate, counts } = fitComparison(input);
  return { verdict: decided, estimate, counts };
}

/**
 * The answer to one comparison (2.3, 2.4 and 2.5 of the method): d = theta + receiver offsets + error,
 * clusters (call sign, night). Units in dB, above zero when A hears better. Never NaN: what cannot be
 * computed is null and the verdict says why. O(units).
 */
export function answerComparison(input: ComparisonInput): ComparisonResult {
  const { question, antennas, rules, marginDb, sectorCount } = input;
  const fitted = fitComparison(input);
  const { selected: units, offsets, clusters, counts, correctedDb, separable, test } = fitted;
  const heardOnly = selectHeardOnly(input);
  const stations = stationRows(input, units, correctedDb, heardOnly);
  const halfWeight = halfWeightStations(stations.map((s) => s.units));

  return {
    ...{ question, antennas, rules, marginDb, sectorCount },
    ...{ verdict: fitted.verdict, estimate: fitted.estimate, counts },
    offsets: offsets.flatMap((o, k) => {
      const c = fitted.coefficients[k + 1];
      if (!c || c.estimate === null) return [];
      const { receiverId, againstReceiverId, bandMetres } = o;
      return [
        { receiverId, againstReceiverId, bandMetres, offsetDb: c.estimate, intervalDb: tuple(c.interval) },
      ];
    }),
    rank: separable ? rankView(correctedDb, clusters, counts.clusters, question.zeros) : null,
    equivalence: test && test.p !== null ? { p: test.p, equivalent: test.equivalent } : null,
    histogram: histogram(correctedDb),
    sectors: comparisonCells(units, offsets, clusters, bySector),
    bandHours: { basis: question.hourBasis, cells: comparisonCells(units, offsets, clusters, byBandAndHour) },
    nights: comparisonCells(units, offsets, clusters, byNight),
    fairness: {
      exclusions: countExclusions(input, fitted.leftOut),
      receiverBalance: receiverBalance(units),
      listening: listeningHours(input),
      separable,
      heardOnly: heardOnlyTest(heardOnly),
      halfWeightStations: halfWeight,
      warnings: thinEvidence(counts.clusters, counts.nights, halfWeight, counts.stations),
    },
    stations: stations.slice(0, mostStationRows),
    stationsTruncated: stations.length > mostStationRows,
  };
}

function tuple(interval: readonly [number, number] | null): [number, number] | null {
  return interval && [interval[0], interval[1]];
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

/** Each cluster's mean difference with the receiver offsets taken out. */
export function clusterMeans(
  correctedDb: Float64Array,
  clusters: Int32Array,
  clusterCount: number,
): Float64Array {
  const sums = new Float64Array(clusterCount);
  const counts = new Int32Array(clusterCount);
  for (let i = 0; i < correctedDb.length; i++) {
    sums[clusters[i]!]! += correctedDb[i]!;
    counts[clusters[i]!]!++;
  }
  return sums.map((sum, c) => sum / counts[c]!);
}

/** Rank tests, paired t and the chance that A hears better, all on cluster means (2.4, items 2 and 3). */
function rankView(
  correctedDb: Float64Array,
  clusters: Int32Array,
  clusterCount: number,
  zeros: 'pratt' | 'drop',
): ComparisonResult['rank'] {
  if (clusterCount < 2) return null;
  const means = clusterMeans(correctedDb, clusters, clusterCount);
  // One rule for zeros in the whole rank view: where they are dropped before ranking, the shift estimated
  // by inverting that ranking does not see them either (as in R's wilcox.test).
  const ranked = zeros === 'drop' ? means.filter((d) => Math.abs(d) > tieResolutionDb) : means;
  const shift = hodgesLehmann(ranked.length > 0 ? ranked : means);
  const ranks = signedRank(means, { zeros, resolution: tieResolutionDb });
  const signs = signTest(means, { resolution: tieResolutionDb });
  const paired = pairedT(means);
  return {
    clusterMeanDb: paired.estimate,
    hodgesLehmannDb: shift.estimate,
    hodgesLehmannIntervalDb: tuple(shift.interval),
    signedRankP: ranks.n === 0 ? null : ranks.p,
    signTestP: signs.positive + signs.negative === 0 ? null : signs.p,
    pairedTP: paired.p,
    effectSizeDz: paired.dz,
    chanceAHearsBetter: signs.chance,
  };
}
