import { type Numbers, requireNumbers, requireOpenUnit, requirePositive } from './arguments.ts';
import { chiSquaredUpper } from './distributions/chi-squared.ts';
import { normalUpper, normalUpperQuantile } from './distributions/normal.ts';
import { tTwoSided, tUpperQuantile } from './distributions/student.ts';
import type { Interval } from './intervals.ts';

export interface PoolOptions {
  /** Confidence level of all intervals; 0.95 unless changed. */
  level?: number;
  /** How tau^2 is estimated; `paule-mandel` unless changed. */
  method?: 'paule-mandel' | 'dersimonian-laird';
  /**
   * `normal`, or `hartung-knapp`: the standard error scaled by how well the weights describe the spread,
   * and t with cells - 1 degrees of freedom. `normal` unless changed.
   */
  interval?: 'normal' | 'hartung-knapp';
}

export interface PooledMean {
  /** Variance of the true cell values about their mean, dB^2. */
  tau2: number;
  estimate: number;
  /** Normal-theory standard error, 1 / sqrt(sum of weights). */
  se: number;
}

export interface PooledCell {
  /** Shrunken toward the mean. */
  estimate: number;
  se: number;
  interval: Interval;
  /** Share of the cell's own estimate in the shrunken one, tau^2 / (tau^2 + se^2). */
  weight: number;
}

export interface PoolResult {
  /** Cells. */
  k: number;
  /** Mean of the true cell values, by the chosen method. */
  estimate: number;
  /** Null with `hartung-knapp` when one cell, or cells all equal, leave no spread to scale by. */
  se: number | null;
  /** k - 1 with `hartung-knapp`, null with `normal`. */
  df: number | null;
  /** Two-sided p of "the mean is zero". */
  p: number | null;
  interval: Interval | null;
  level: number;
  method: 'paule-mandel' | 'dersimonian-laird';
  tau2: number;
  /** Standard deviation of the true cell values, dB. */
  tau: number;
  pauleMandel: PooledMean;
  dersimonianLaird: PooledMean;
  /** Cochran's Q: do the cells differ by more than their errors? */
  q: number;
  qDf: number;
  /** Null for a single cell. */
  qP: number | null;
  /** Share of the spread of the estimates that is not error, max(0, (Q - df) / Q); 0 for a single cell. */
  iSquared: number;
  /** One per cell, in the order given; null with the standard error. */
  cells: PooledCell[] | null;
  /** Why there is no standard error, null when there is one. */
  reason: 'one-cell' | 'no-spread' | null;
}

interface Weighted {
  /** Sum of the weights 1 / (v + tau^2), and of their squares. */
  total: number;
  squares: number;
  mean: number;
  /** Sum of w (y - mean)^2, and of w^2 (y - mean)^2. */
  q: number;
  q2: number;
}

function weigh(estimates: Numbers, variances: Float64Array, tau2: number): Weighted {
  let [total, squares, mean] = [0, 0, 0];
  for (let i = 0; i < variances.length; i++) {
    const w = 1 / (variances[i]! + tau2);
    total += w;
    squares += w * w;
    mean += (w / total) * (estimates[i]! - mean);
  }
  let [q, q2] = [0, 0];
  for (let i = 0; i < variances.length; i++) {
    const w = 1 / (variances[i]! + tau2);
    const part = w * (estimates[i]! - mean) ** 2;
    q += part;
    q2 += w * part;
  }
  return { total, squares, mean, q, q2 };
}

/** Root of sum of w (y - mean)^2 = k - 1 by Newton from zero, from where it is approached from below. */
function pauleMandelTau2(estimates: Numbers, variances: Float64Array): number {
  const goal = variances.length - 1;
  let tau2 = 0;
  for (let i = 0; i < 500; i++) {
    const { q, q2 } = weigh(estimates, variances, tau2);
    const step = (q - goal) / q2;
    if (!(step > 1e-15 * tau2)) break;
    tau2 += step;
  }
  return tau2;
}

/**
 * Random-effects pooling of cells: their common mean, how far the true cell values spread about it, and
 * each cell drawn toward the mean as far as its own error asks.
 *
 * Cell i estimates theta_i with standard error s_i; theta_i has mean mu and variance tau^2. Weights w_i =
 * 1 / (s_i^2 + tau^2), mu = sum w y / sum w, se = 1 / sqrt(sum w). Q = sum of (y - mean)^2 / s^2 about the
 * mean with tau^2 = 0. DerSimonian-Laird: tau^2 = max(0, (Q - (k - 1)) / (S1 - S2 / S1)), S1 and S2 the
 * sums of 1 / s^2 and 1 / s^4. Paule-Mandel: the tau^2 >= 0 at which sum of w (y - mu)^2 = k - 1.
 * Hartung-Knapp: se^2 times sum of w (y - mu)^2 / (k - 1). Shrunken cell (empirical Bayes): with lambda_i =
 * tau^2 / (tau^2 + s_i^2), estimate lambda y + (1 - lambda) mu, se^2 = lambda s_i^2 + (1 - lambda)^2 se(mu)^2;
 * tau^2 is taken as known, so with few cells these intervals are somewhat short. Cells are taken as
 * independent. Sources: DerSimonian and Laird (1986), Control. Clin. Trials 7; Paule and Mandel (1982),
 * J. Res. NBS 87; Higgins and Thompson (2002), Stat. Med. 21 (I^2); Hartung and Knapp (2001), Stat. Med. 20;
 * Raudenbush and Bryk (1985), J. Educ. Stat. 10 (shrinkage). Equals R metafor::rma(method = "DL" or "PM",
 * test = "z" or "knha") and blup(). O(k).
 *
 * One cell: tau^2 = 0, the cell itself, qP null; with Hartung-Knapp one cell, or cells all equal, leave se,
 * p, interval and cells null and `reason` says why.
 *
 * @param estimates one per cell, dB
 * @param standardErrors one per cell, > 0, dB (not variances)
 * @throws RangeError naming `estimates`, `standardErrors`, `level`, `method` or `interval`: empty, unequal
 *   lengths, not finite, an error that is not positive, level outside (0, 1)
 * @example pool([0, 4], [1, 1]) // estimate 2, tau2 7, cells 0.25 and 3.75
 */
export function pool(estimates: Numbers, standardErrors: Numbers, options: PoolOptions = {}): PoolResult {
  const { level = 0.95, method = 'paule-mandel', interval: kind = 'normal' } = options;
  requireOpenUnit('level', level);
  if (method !== 'paule-mandel' && method !== 'dersimonian-laird') {
    throw new RangeError("method must be 'paule-mandel' or 'dersimonian-laird'");
  }
  if (kind !== 'normal' && kind !== 'hartung-knapp') {
    throw new RangeError("interval must be 'normal' or 'hartung-knapp'");
  }
  requireNumbers('estimates', estimates);
  const k = estimates.length;
  if (standardErrors.length !== k) {
    throw new RangeError(`standardErrors must hold one value per cell (${k}), got ${standardErrors.length}`);
  }
  const variances = new Float64Array(k);
  for (let i = 0; i < k; i++) {
    requirePositive(`standardErrors[${i}]`, standardErrors[i]!);
    variances[i] = standardErrors[i]! ** 2;
    // Beyond these bounds a weight would be zero or infinite.
    requirePositive(`standardErrors[${i}] squared`, variances[i]!);
    requirePositive(`standardErrors[${i}] to the power -4`, variances[i]! ** -2);
  }

  const fixed = weigh(estimates, variances, 0);
  const meanAt = (tau2: number): PooledMean => {
    const { mean, total } = weigh(estimates, variances, tau2);
    return { tau2, estimate: mean, se: 1 / Math.sqrt(total) };
  };
  const spare = fixed.total - fixed.squares / fixed.total;
  const dersimonianLaird = meanAt(k === 1 ? 0 : Math.max(0, (fixed.q - (k - 1)) / spare));
  const pauleMandel = meanAt(k === 1 ? 0 : pauleMandelTau2(estimates, variances));
  const chosen = method === 'paule-mandel' ? pauleMandel : dersimonianLaird;
  const { tau2, estimate } = chosen;

  let se: number | null = chosen.se;
  let reason: PoolResult['reason'] = null;
  if (kind === 'hartung-knapp') {
    const scale = k === 1 ? 0 : weigh(estimates, variances, tau2).q / (k - 1);
    se = scale > 0 ? chosen.se * Math.sqrt(scale) : null;
    if (se === null) reason = k === 1 ? 'one-cell' : 'no-spread';
  }
  const df = kind === 'hartung-knapp' ? k - 1 : null;
  const critical = (tail: number) => (df === null ? normalUpperQuantile(tail) : tUpperQuantile(tail, df));
  const around = (centre: number, error: number): Interval => {
    const reach = critical((1 - level) / 2) * error;
    return [centre - reach, centre + reach];
  };
  const cell = (i: number, error: number): PooledCell => {
    const weight = tau2 / (tau2 + variances[i]!);
    const rest = variances[i]! / (tau2 + variances[i]!);
    const own = weight * estimates[i]! + rest * estimate;
    const ownError = Math.sqrt(weight * variances[i]! + rest * rest * error * error);
    return { estimate: own, se: ownError, interval: around(own, ownError), weight };
  };
  let p: number | null = null;
  if (se !== null) {
    const statistic = estimate / se;
    p = df === null ? 2 * normalUpper(Math.abs(statistic)) : tTwoSided(statistic, df);
  }
  return {
    k,
    estimate,
    se,
    df,
    p,
    interval: se === null ? null : around(estimate, se),
    level,
    method,
    tau2,
    tau: Math.sqrt(tau2),
    pauleMandel,
    dersimonianLaird,
    q: fixed.q,
    qDf: k - 1,
    qP: k === 1 ? null : chiSquaredUpper(fixed.q, k - 1),
    iSquared: fixed.q > k - 1 && k > 1 ? (fixed.q - (k - 1)) / fixed.q : 0,
    cells: se === null ? null : Array.from({ length: k }, (_, i) => cell(i, se)),
    reason,
  };
}
