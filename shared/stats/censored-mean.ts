import { type Numbers, requireNumbers, requireOpenUnit } from './arguments.ts';
import {
  clusterScores,
  type CensoredFit,
  type CensoredRows,
  type FitFailure,
  fitCensored,
} from './censored-fit.ts';
import { readClusters } from './cluster-ids.ts';
import { normalUpper, normalUpperQuantile } from './distributions/normal.ts';
import { type Interval, tResult } from './intervals.ts';
import { leastSquares } from './least-squares.ts';

/** What is known of each value: it lies from `lower` to `upper`. */
export interface CensoredObservations {
  /** -Infinity: known only to lie at or below `upper` (left-censored). */
  lower: Numbers;
  /** Infinity: known only to lie at or above `lower` (right-censored). Equal to `lower`: exact. */
  upper: Numbers;
}

export interface CensoredMeanOptions {
  /** Confidence level of the interval; 0.95 unless changed. */
  level?: number;
  /** Dense cluster id per row: standard errors then take whole clusters as independent. */
  clusters?: Numbers;
  /** Further columns of the mean beside the intercept, e.g. receiver offsets: one value per row each. */
  columns?: readonly Numbers[];
}

export type CensoredReason =
  | FitFailure
  /** Every row is censored on the same side: nothing bounds the mean on the other. */
  | 'one-sided'
  /** The intercept is tangled with the columns. */
  | 'cannot-be-separated'
  /** The estimate stands, but one cluster says nothing about the spread between clusters. */
  | 'one-cluster'
  /** The estimate stands, but the scores cancel within every cluster and leave no error. */
  | 'no-cluster-spread';

export interface CensoredMeanResult {
  /** Mean at columns of zero; null when there is a reason, but for `one-cluster` and `no-cluster-spread`. */
  estimate: number | null;
  /** Cluster-robust when clusters are given, from the observed information otherwise. */
  se: number | null;
  /** From the observed information, whatever the clusters. */
  modelSe: number | null;
  /** Clusters - 1; null without clusters, where the interval is the normal one. */
  df: number | null;
  /** Two-sided p of "the mean is zero". */
  p: number | null;
  interval: Interval | null;
  level: number;
  /** Standard deviation of the normal distribution, as estimated. */
  sd: number | null;
  /** Standard error of log sd, of the same kind as `se`. */
  logSdSe: number | null;
  logLikelihood: number | null;
  /** One per column; null where it is tangled with others. */
  coefficients: { estimate: number | null; se: number | null }[];
  n: number;
  exact: number;
  leftCensored: number;
  rightCensored: number;
  intervalCensored: number;
  clusters: number | null;
  reason: CensoredReason | null;
}

function readBounds({ lower, upper }: CensoredObservations) {
  const n = lower.length;
  if (n === 0) throw new RangeError('lower must hold at least 1 value, got 0');
  if (upper.length !== n) {
    throw new RangeError(`lower and upper must have equal lengths, got ${n} and ${upper.length}`);
  }
  const counts = { n, exact: 0, leftCensored: 0, rightCensored: 0, intervalCensored: 0 };
  let [highestLower, lowestUpper] = [-Infinity, Infinity];
  let [centre, squares] = [0, 0];
  for (let i = 0; i < n; i++) {
    const [low, high] = [lower[i]!, upper[i]!];
    // Infinite on the wrong side, on both, or not a number at all: none of these is at most the other.
    if (!(low <= high && low < Infinity && high > -Infinity)) {
      throw new RangeError(`lower must be at or below upper, entry ${i} is ${low} to ${high}`);
    }
    if (low === high) counts.exact += 1;
    else if (low === -Infinity && high === Infinity) {
      throw new RangeError(`lower and upper must bound each value, entry ${i} is free on both sides`);
    } else if (low === -Infinity) counts.leftCensored += 1;
    else if (high === Infinity) counts.rightCensored += 1;
    else counts.intervalCensored += 1;
    highestLower = Math.max(highestLower, low);
    lowestUpper = Math.min(lowestUpper, high);
    // Running mean and spread of a finite bound of each row (Welford 1962): a scale to work on.
    const bound = low === -Infinity ? high : low;
    const step = bound - centre;
    centre += step / (i + 1);
    squares += step * (bound - centre);
  }
  return { counts, highestLower, lowestUpper, centre, spread: Math.sqrt(squares / n) };
}

/** Each column less its mean over its largest size, with what undoes it. */
function standardise(columns: readonly Float64Array[], n: number) {
  return columns.map((column) => {
    let mean = 0;
    for (let i = 0; i < n; i++) mean += column[i]! / n;
    let scale = 0;
    for (let i = 0; i < n; i++) scale = Math.max(scale, Math.abs(column[i]! - mean));
    const standard = new Float64Array(n);
    for (let i = 0; i < n; i++) standard[i] = (column[i]! - mean) / scale;
    return { column: standard, mean, scale };
  });
}

/** Columns that can be told apart from the intercept and each other; null when the intercept cannot. */
function separate(columns: readonly Float64Array[], n: number): { used: number[]; clear: boolean[] } | null {
  if (columns.length === 0) return { used: [], clear: [] };
  const design = { n, cells: null, cellCount: 0, columns: [new Float64Array(n).fill(1), ...columns] };
  const { basis, nullSpace } = leastSquares(design, new Float64Array(n), null);
  if (nullSpace.some((vector) => vector[0] !== 0)) return null;
  return {
    used: basis.filter((j) => j > 0).map((j) => j - 1),
    clear: columns.map((_, j) => nullSpace.every((vector) => vector[j + 1] === 0)),
  };
}

/** Covariance of the parameters from the scores of clusters: bread * meat * bread, no factor. */
function sandwich({ inverse }: CensoredFit, scores: Float64Array, d: number): Float64Array {
  const covariance = new Float64Array(d * d);
  const moved = new Float64Array(d);
  for (let at = 0; at < scores.length; at += d) {
    for (let a = 0; a < d; a++) {
      moved[a] = 0;
      for (let b = 0; b < d; b++) moved[a]! += inverse[a * d + b]! * scores[at + b]!;
    }
    for (let a = 0; a < d; a++) for (let b = 0; b < d; b++) covariance[a * d + b]! += moved[a]! * moved[b]!;
  }
  return covariance;
}

/** Variance of the combination c of the parameters. */
function varianceOf(covariance: Float64Array, c: ArrayLike<number>): number {
  let variance = 0;
  for (let a = 0; a < c.length; a++) {
    for (let b = 0; b < c.length; b++) variance += c[a]! * c[b]! * covariance[a * c.length + b]!;
  }
  return variance;
}

/**
 * Mean of a normal distribution from values of which some are known only to lie below, above or between
 * bounds, by maximum likelihood.
 *
 * Log-likelihood: the sum of log density of exact values, log P(Y <= upper) of left-censored, log P(Y >=
 * lower) of right-censored, log P(lower <= Y <= upper) of others, Y normal with mean theta + sum of
 * columns times coefficients and one standard deviation. Newton's method in Olsen's (1978) parameters,
 * in which it is concave. Sources: Tobin (1958), Econometrica 26; Olsen (1978), Econometrica 46.
 *
 * Standard errors: from the observed information, normal interval, without `clusters`. With them: V
 * (sum over clusters of s_g s_g') V * C/(C-1) * (n-1)/(n-k), V the inverse information, s_g the cluster's
 * sum of scores, k the coefficients of the mean, t interval with C - 1 degrees of freedom; without any
 * censoring this is clusterRegression's. Equals R survival::survreg(Surv(lower, upper, type =
 * "interval2") ~ 1, dist = "gaussian"), its robust = TRUE, cluster = errors but for that factor.
 *
 * No maximum exists, and all but the counts is null, when all rows are censored on one side, or all
 * could hold one and the same value, or only one-sided rows lie so that the wider the better, or a
 * column's rows all push its coefficient one way; `reason` says which. Time O(n m^2) per step (100,000
 * rows in some tens of ms), memory O(n m).
 *
 * @param observations lower and upper bound per row, dB (see CensoredObservations)
 * @throws RangeError naming `lower`, `upper`, `columns[j]`, `clusters` or `level`: empty, unequal
 *   lengths, NaN, lower above upper, no bound at all, level outside (0, 1)
 * @example
 * // 3 and 5 dB seen, a third at least 6 dB
 * censoredMean({ lower: [3, 5, 6], upper: [3, 5, Infinity] }).estimate // 5.03
 */
export function censoredMean(
  observations: CensoredObservations,
  options: CensoredMeanOptions = {},
): CensoredMeanResult {
  const level = options.level ?? 0.95;
  requireOpenUnit('level', level);
  const { counts, highestLower, lowestUpper, centre, spread } = readBounds(observations);
  const { n } = counts;
  const raw = (options.columns ?? []).map((column, j) => {
    if (column.length !== n) {
      throw new RangeError(`columns[${j}] must hold one value per row (${n}), got ${column.length}`);
    }
    requireNumbers(`columns[${j}]`, column);
    return Float64Array.from(column);
  });
  const clusters = options.clusters ? readClusters('clusters', options.clusters, n) : null;

  const failed = (reason: CensoredReason): CensoredMeanResult => ({
    estimate: null,
    se: null,
    modelSe: null,
    df: clusters && clusters.count - 1,
    p: null,
    interval: null,
    level,
    sd: null,
    logSdSe: null,
    logLikelihood: null,
    coefficients: raw.map(() => ({ estimate: null, se: null })),
    ...counts,
    clusters: clusters && clusters.count,
    reason,
  });
  if (counts.leftCensored === n || counts.rightCensored === n) return failed('one-sided');
  // All bounds hold one common value: the narrower the normal about it, the better.
  if (highestLower <= lowestUpper) return failed('no-spread');
  const separated = separate(raw, n);
  if (!separated) return failed('cannot-be-separated');

  const scaled = standardise(
    separated.used.map((j) => raw[j]!),
    n,
  );
  const ones = new Float64Array(n).fill(1);
  const onScale = (bounds: Numbers) => {
    const scaledBounds = new Float64Array(n);
    for (let i = 0; i < n; i++) scaledBounds[i] = (bounds[i]! - centre) / spread;
    return scaledBounds;
  };
  const rows: CensoredRows = {
    lower: onScale(observations.lower),
    upper: onScale(observations.upper),
    columns: [ones, ...scaled.map(({ column }) => column)],
  };
  const fit = fitCensored(rows);
  if (typeof fit === 'string') return failed(fit);

  const m = rows.columns.length;
  const d = m + 1;
  const tau = fit.parameters[m]!;
  const slope = (j: number) => (spread * fit.parameters[j]!) / tau;
  /** Change of coefficient with the parameters: c over the columns, and by 1 / sigma. */
  const gradient = (c: number[]) => {
    const value = c.reduce((sum, weight, j) => sum + weight * slope(j), 0);
    return { value, slopes: [...c.map((weight) => (spread * weight) / tau), -value / tau] };
  };
  const mean = gradient([1, ...scaled.map((own) => -own.mean / own.scale)]);
  const sd = spread / tau;

  const robust = clusters && clusters.count > 1;
  let covariance = fit.inverse;
  if (robust) {
    const factor = (clusters.count / (clusters.count - 1)) * ((n - 1) / Math.max(1, n - m));
    const scores = clusterScores(rows, fit.parameters, clusters.ids, clusters.size);
    covariance = sandwich(fit, scores, d).map((value) => value * factor);
  }
  const missing = clusters && !robust;
  const errorOf = (slopes: number[]) => {
    if (missing) return null;
    const variance = varianceOf(covariance, slopes);
    // Scores that cancel within every cluster leave rounding behind, which is no error.
    return variance > 1e-12 * varianceOf(fit.inverse, slopes) ? Math.sqrt(variance) : null;
  };
  const logSdSlopes = [...new Array<number>(m).fill(0), -1 / tau];

  const estimate = centre + mean.value;
  const se = errorOf(mean.slopes);
  const coefficients = raw.map((_, j) => {
    const at = separated.used.indexOf(j);
    if (!separated.clear[j] || at < 0) return { estimate: null, se: null };
    const { value, slopes } = gradient(
      Array.from({ length: m }, (__, a) => (a === at + 1 ? 1 / scaled[at]!.scale : 0)),
    );
    return { estimate: value, se: errorOf(slopes) };
  });
  const result = {
    ...failed('one-cluster'),
    estimate,
    modelSe: Math.sqrt(varianceOf(fit.inverse, mean.slopes)),
    sd,
    logLikelihood: fit.logLikelihood - counts.exact * Math.log(spread),
    coefficients,
  };
  if (se === null) return { ...result, reason: missing ? 'one-cluster' : 'no-cluster-spread' };
  const logSdSe = errorOf(logSdSlopes);
  if (robust) {
    const { df, p, interval } = tResult(estimate, se, clusters.count - 1, level);
    return { ...result, se, df, p, interval, logSdSe, reason: null };
  }
  const reach = normalUpperQuantile((1 - level) / 2) * se;
  return {
    ...result,
    se,
    p: 2 * normalUpper(Math.abs(estimate / se)),
    interval: [estimate - reach, estimate + reach],
    logSdSe,
    reason: null,
  };
}
