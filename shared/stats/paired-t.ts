import { mean, sampleStandardDeviation } from 'simple-statistics';
import { type Numbers, readPairs, requireOpenUnit } from './arguments.ts';
import { tResult, type TResult } from './intervals.ts';

export interface PairedTOptions {
  /** Confidence level of the interval; 0.95 unless changed. */
  level?: number;
}

export interface PairedTResult extends Omit<TResult, 'se' | 't' | 'p' | 'interval'> {
  n: number;
  /** Sample standard deviation of the differences, divisor n - 1. */
  sd: number;
  se: number | null;
  t: number | null;
  p: number | null;
  interval: TResult['interval'] | null;
  /** Effect size: mean difference over sd. */
  dz: number | null;
}

/**
 * Student's t test and interval for the mean of paired differences.
 *
 * estimate = mean d, se = sd / sqrt(n), t = estimate / se with n - 1 degrees of freedom; dz = estimate /
 * sd (Cohen 1988). Source: Student (1908), Biometrika 6; equals R t.test(a, b, paired = TRUE). O(n).
 *
 * When all differences are equal they say nothing about their spread: se, t, p, interval and dz are
 * null.
 *
 * @param args differences (dB), or two lists a and b of equal length whose differences a - b count;
 *   then options
 * @throws RangeError naming `differences`, `a`, `b` or `level`: fewer than two values, not finite,
 *   unequal lengths, level outside (0, 1)
 * @example pairedT([1, 2, 3.5], { level: 0.9 }).estimate // 2.1667
 */
export function pairedT(differences: Numbers, options?: PairedTOptions): PairedTResult;
export function pairedT(a: Numbers, b: Numbers, options?: PairedTOptions): PairedTResult;
export function pairedT(
  ...args: [Numbers, PairedTOptions?] | [Numbers, Numbers, PairedTOptions?]
): PairedTResult {
  const { differences, options } = readPairs<PairedTOptions>(args, 2);
  const level = options.level ?? 0.95;
  requireOpenUnit('level', level);
  const values = Array.from(differences);
  const n = values.length;
  const estimate = mean(values);
  const sd = sampleStandardDeviation(values);
  const largest = values.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
  // A spread below the arithmetic's own noise is no spread.
  if (sd <= largest * 1e-14) {
    return { estimate, se: null, df: n - 1, t: null, p: null, level, interval: null, n, sd: 0, dz: null };
  }
  return { ...tResult(estimate, sd / Math.sqrt(n), n - 1, level), n, sd, dz: estimate / sd };
}
