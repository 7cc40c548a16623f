import { requireOpenUnit, requirePositive } from '../arguments.ts';
import { betaLogitDensity, incompleteBeta } from './beta.ts';
import { normalUpperQuantile } from './normal.ts';
import { solveIncreasing } from './solve.ts';

/** df / (df + t^2) and its complement, both without cancellation; t^2 may overflow to their limits. */
function split(t: number, df: number): { x: number; y: number } {
  const ratio = (t * t) / df;
  return { x: 1 / (1 + ratio), y: 1 / (1 + 1 / ratio) };
}

/** P(|T| > t) and its complement for t >= 0: I_x(df/2, 1/2) at x = df / (df + t^2). DLMF 8.17. */
function outside(t: number, df: number): { beyond: number; within: number } {
  const { x, y } = split(t, df);
  const { lower, upper } = incompleteBeta(0.5, df / 2, y, x);
  return { beyond: upper, within: lower };
}

function requireT(t: number, df: number): void {
  if (Number.isNaN(t)) throw new RangeError('t must be a number, got NaN');
  requirePositive('df', df);
}

/**
 * P(T > t) for Student's t with df degrees of freedom, the tail itself.
 *
 * @throws RangeError when t is NaN or df is not a positive number
 */
export function tUpper(t: number, df: number): number {
  requireT(t, df);
  const { beyond, within } = outside(Math.abs(t), df);
  return t >= 0 ? beyond / 2 : 0.5 + within / 2;
}

/** P(T <= t). */
export function tCdf(t: number, df: number): number {
  return tUpper(-t, df);
}

/** P(|T| >= |t|), the two-sided p of a t statistic. */
export function tTwoSided(t: number, df: number): number {
  requireT(t, df);
  return outside(Math.abs(t), df).beyond;
}

/**
 * t with P(T > t) = q.
 *
 * Newton's method on the log of the tail against log t; t up to about 1e150. O(sqrt(df)) per step, a
 * handful of steps.
 *
 * @throws RangeError when q is outside (0, 1) or df is not a positive number
 * @example tUpperQuantile(0.025, 9) // 2.262157162740992
 */
export function tUpperQuantile(q: number, df: number): number {
  requireOpenUnit('q', q);
  requirePositive('df', df);
  if (q === 0.5) return 0;
  if (q > 0.5) return -tUpperQuantile(1 - q, df);
  // Near the middle the tail says little about t; the mass between -t and t does.
  const central = q > 0.25;
  const goal = Math.log(central ? 1 - 2 * q : 2 * q);
  const logT = solveIncreasing(
    (u) => {
      const t = Math.exp(u);
      const { beyond, within } = outside(t, df);
      const { x, y } = split(t, df);
      const slope = 2 * betaLogitDensity(df / 2, 0.5, x, y);
      if (central) return [Math.log(within) - goal, slope / within];
      return beyond === 0 ? [Number.MAX_VALUE, 1] : [goal - Math.log(beyond), slope / beyond];
    },
    -350,
    350,
    // The normal quantile is always nearer to zero than Student's.
    Math.log(normalUpperQuantile(q)),
  );
  return Math.exp(logT);
}

/** t with P(T <= t) = p. */
export function tQuantile(p: number, df: number): number {
  requireOpenUnit('p', p);
  return p <= 0.5 ? 0 - tUpperQuantile(p, df) : tUpperQuantile(1 - p, df);
}
