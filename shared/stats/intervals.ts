import { requireOpenUnit, requirePositive } from './arguments.ts';
import { tTwoSided, tUpperQuantile } from './distributions/student.ts';

/** Lower and upper end, in the unit of the data. */
export type Interval = [lo: number, hi: number];

export interface TResult {
  estimate: number;
  /** Standard error, in the unit of the data. */
  se: number;
  /** Degrees of freedom. */
  df: number;
  /** estimate / se. */
  t: number;
  /** Two-sided p of "the truth is zero". */
  p: number;
  /** Confidence level of the interval. */
  level: number;
  interval: Interval;
}

/**
 * estimate +- t quantile * se.
 *
 * @param estimate any unit
 * @param se standard error > 0, same unit
 * @param df degrees of freedom > 0
 * @param level in (0, 1)
 * @throws RangeError naming the argument
 * @example tInterval(1.8, 0.4, 20, 0.95) // [0.966, 2.634]
 */
export function tInterval(estimate: number, se: number, df: number, level: number): Interval {
  requireOpenUnit('level', level);
  requirePositive('se', se);
  const reach = tUpperQuantile((1 - level) / 2, df) * se;
  return [estimate - reach, estimate + reach];
}

/** A t statistic with its two-sided p and interval. */
export function tResult(estimate: number, se: number, df: number, level: number): TResult {
  const interval = tInterval(estimate, se, df, level);
  return { estimate, se, df, t: estimate / se, p: tTwoSided(estimate / se, df), level, interval };
}
