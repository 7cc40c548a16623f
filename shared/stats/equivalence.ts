import { type Numbers, requireFinite, requireOpenUnit, requirePositive } from './arguments.ts';
import { tUpper } from './distributions/student.ts';
import { type Interval, tInterval } from './intervals.ts';
import { pairedT } from './paired-t.ts';

/** An estimate with its standard error and degrees of freedom, e.g. a coefficient of clusterRegression. */
export interface EstimateWithError {
  /** dB */
  estimate: number;
  /** Standard error, dB; null where the data bear none. */
  se: number | null;
  df: number;
}

export interface EquivalenceOptions {
  /** Largest difference that does not matter, dB; 1 unless changed. */
  margin?: number;
  /** Size of each one-sided test; 0.05 unless changed. */
  alpha?: number;
}

export interface EquivalenceResult {
  estimate: number;
  se: number | null;
  df: number;
  margin: number;
  alpha: number;
  /** One-sided p against "the truth is -margin or lower". */
  pAboveLower: number | null;
  /** One-sided p against "the truth is margin or higher". */
  pBelowUpper: number | null;
  /** The larger of the two. */
  p: number | null;
  /** 1 - 2 alpha interval; equivalent exactly when it lies inside (-margin, margin). */
  interval: Interval | null;
  /** False too when there is no standard error to judge by. */
  equivalent: boolean;
}

/**
 * Practical equivalence by two one-sided t tests.
 *
 * t1 = (estimate + margin) / se, t2 = (margin - estimate) / se, each against the upper tail of Student's
 * t; equivalent when both p are below alpha. Source: Schuirmann (1987), J. Pharmacokin. Biopharm. 15,
 * 657-680. O(1), or O(n) from differences. Without a standard error (se null, or all differences
 * equal) p and interval are null.
 *
 * @param input differences (dB, at least two), or an estimate with its error
 * @throws RangeError naming `margin`, `alpha`, `estimate`, `se`, `df` or `differences`
 * @example equivalence({ estimate: 0.1, se: 0.3, df: 20 }, { margin: 1 }).equivalent // true
 */
export function equivalence(
  input: Numbers | EstimateWithError,
  options: EquivalenceOptions = {},
): EquivalenceResult {
  const { margin = 1, alpha = 0.05 } = options;
  requirePositive('margin', margin);
  if (!(alpha > 0 && alpha < 0.5)) throw new RangeError(`alpha must lie between 0 and 0.5, got ${alpha}`);
  const { estimate, se, df } = 'length' in input ? pairedT(input) : input;
  requireFinite('estimate', estimate);
  const asked = { estimate, se, df, margin, alpha };
  if (se === null) {
    return { ...asked, pAboveLower: null, pBelowUpper: null, p: null, interval: null, equivalent: false };
  }
  requirePositive('se', se);
  requirePositive('df', df);
  const level = 1 - 2 * alpha;
  requireOpenUnit('level', level);
  const pAboveLower = tUpper((estimate + margin) / se, df);
  const pBelowUpper = tUpper((margin - estimate) / se, df);
  const p = Math.max(pAboveLower, pBelowUpper);
  const interval = tInterval(estimate, se, df, level);
  return { ...asked, pAboveLower, pBelowUpper, p, interval, equivalent: p < alpha };
}
