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
import type { Coefficient } from '../stats/index.ts';
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

/**
 * The answer to one comparison (2.3, 2.4 and 2.5 of the method): d = theta + receiver offsets + error,
 * clusters (call sign, night). Units in dB, above zero when A hears better. Never NaN: what cannot be
 * computed is null and the verdict says why. O(units).
 */
export function answerComparison(input: ComparisonInput): ComparisonResult {
  const { question, antennas, marginDb } = input;
  const { units, leftOut } = selectUnits(input);
  const heardOnly = selectHeardOnly(input);
  const offsets = offsetColumns(units);
  const { ids: clusters, count: clusterCount } = clusterIds(clusterKeys(units));
  const nightCount = new Set(units.night).size;
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
  const rho = fit ? fit.solution.subarray(1) : new Float64Array(0);
  const corrected = separable ? withoutOffsets(units, offsets, rho) : Float64Array.from(units.differenceDb);
  const test = theta && separable && theta.se !== null ? equivalenceOf(theta, fit?.df ?? 0, marginDb) : null;
  const estimate = theta && test && fit ? estimateOf(theta, fit.df, test.interval) : null;
  const decided = verdict({
    estimate: theta?.estimate ?? null,
    interval: estimate?.interval95Db ?? null,
    interval90: estimate?.interval90Db ?? null,
    clusters: clusterCount,
    nights: nightCount,
    margin: marginDb,
    separable,
  });
  const code = decided.code.replaceAll('-', ' ') as VerdictCode;
  const receiverName = (id: number) => input.receivers.find((r) => r.id === id)?.callSign ?? `receiver ${id}`;
  const { tangle, cures } = separable
    ? { tangle: '', cures: [] }
    : explainTangle(units, { a: antennas.a.name, b: antennas.b.name, receiver: receiverName });
  const stations = stationRows(input, units, corrected, heardOnly);
  const counts = countsOf(units, clusterCount, stations.length, nightCount);
  const halfWeight = halfWeightStations(stations.map((s) => s.units));

  return {
    question,
    antennas,
    rules: input.rules,
    marginDb,
    sectorCount: input.sectorCount,
    verdict: {
      code,
      sentence: verdictSentence({
        code,
        nameA: antennas.a.name,
        nameB: antennas.b.name,
        question,
        sectorCount: input.sectorCount,
        estimate,
        counts,
        marginDb,
        tangle,
      }),
      cures,
    },
    estimate,
    counts,
    offsets: offsets.flatMap((o, k) => {
      const c = fit?.coefficients[k + 1];
      if (!c || c.estimate === null) return [];
      const { receiverId, againstReceiverId, bandMetres } = o;
      return [
        { receiverId, againstReceiverId, bandMetres, offsetDb: c.estimate, intervalDb: tuple(c.interval) },
      ];
    }),
    rank: separable ? rankView(corrected, clusters, clusterCount, question.zeros) : null,
    equivalence: test && test.p !== null ? { p: test.p, equivalent: test.equivalent } : null,
    histogram: histogram(corrected),
    sectors: comparisonCells(units, offsets, clusters, bySector),
    bandHours: { basis: question.hourBasis, cells: comparisonCells(units, offsets, clusters, byBandAndHour) },
    nights: comparisonCells(units, offsets, clusters, byNight),
    fairness: {
      exclusions: countExclusions(input, leftOut),
      receiverBalance: receiverBalance(units),
      listening: listeningHours(input),
      separable,
      heardOnly: heardOnlyTest(heardOnly),
      halfWeightStations: halfWeight,
      warnings: thinEvidence(clusterCount, nightCount, halfWeight, stations.length),
    },
    stations: stations.slice(0, mostStationRows),
    stationsTruncated: stations.length > mostStationRows,
  };
}

function tuple(interval: readonly [number, number] | null): [number, number] | null {
  return interval && [interval[0], interval[1]];
}

function equivalenceOf(theta: Coefficient, df: number, margin: number) {
  return equivalence({ estimate: theta.estimate!, se: theta.se, df }, { margin });
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

function countsOf(units: SelectedUnits, clusters: number, stations: number, nights: number) {
  let matches = 0;
  let alternating = 0;
  for (let i = 0; i < units.n; i++) {
    if (units.alternating[i] === 1) alternating++;
    else matches += units.countA[i]!;
  }
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
