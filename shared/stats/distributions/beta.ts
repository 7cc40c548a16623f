import { requireOpenUnit, requirePositive } from '../arguments.ts';
import { continuedFraction } from './continued-fraction.ts';
import { binomialKernel } from './kernels.ts';
import { solveIncreasing } from './solve.ts';

/** Both tails of a distribution at one point; the small one is computed, not the rest of the large one. */
export interface Tails {
  lower: number;
  upper: number;
}

/** I_x(a, b) where its continued fraction converges fast, x at or below about the mean. DLMF 8.17.22. */
function lowerByFraction(a: number, b: number, x: number, y: number): number {
  const factor = (b / (a + b)) * binomialKernel(a, a + b, x, y);
  if (factor === 0) return 0;
  const fraction = continuedFraction(1, (i) => {
    const m = i >> 1;
    const over = (a + i - 1) * (a + i);
    const numerator = i % 2 === 0 ? m * (b - m) * x : -(a + m) * (a + b + m) * x;
    return [numerator / over, 1];
  });
  return factor / fraction;
}

/**
 * Regularised incomplete beta function I_x(a, b) and its complement. y = 1 - x is passed beside x, so
 * that a caller who knows the small one exactly loses nothing.
 *
 * Source: DLMF 8.17.22 by Lentz's method, front factor by Loader (2000). O(sqrt(a + b)).
 */
export function incompleteBeta(a: number, b: number, x: number, y: number): Tails {
  if (x <= 0) return { lower: 0, upper: 1 };
  if (y <= 0) return { lower: 1, upper: 0 };
  if (x < (a + 1) / (a + b + 2)) {
    const lower = lowerByFraction(a, b, x, y);
    return { lower, upper: 1 - lower };
  }
  const upper = lowerByFraction(b, a, y, x);
  return { lower: 1 - upper, upper };
}

/** x^a y^b / B(a, b), the slope of I_x(a, b) against log(x / y). */
export function betaLogitDensity(a: number, b: number, x: number, y: number): number {
  return ((a * b) / (a + b)) * binomialKernel(a, a + b, x, y);
}

/** log(x / (1 - x)) where the wanted tail of the beta distribution holds `probability`. */
export function betaLogitQuantile(
  a: number,
  b: number,
  probability: number,
  tail: 'lower' | 'upper',
): number {
  const sign = tail === 'lower' ? 1 : -1;
  // The smaller of the two tails fixes the quantile; the larger one is blind far out.
  const aim = probability <= 0.5 ? probability : 1 - probability;
  const side = probability <= 0.5 ? tail : tail === 'lower' ? 'upper' : 'lower';
  const direction = probability <= 0.5 ? sign : -sign;
  const goal = Math.log(aim);
  return solveIncreasing(
    (v) => {
      const x = 1 / (1 + Math.exp(-v));
      const y = 1 / (1 + Math.exp(v));
      const reached = incompleteBeta(a, b, x, y)[side];
      if (reached === 0) return [-direction * Number.MAX_VALUE, 1];
      return [direction * (Math.log(reached) - goal), betaLogitDensity(a, b, x, y) / reached];
    },
    -744,
    744,
    Math.log(a / b),
  );
}

function requireShape(x: number, a: number, b: number): void {
  if (Number.isNaN(x)) throw new RangeError('x must be a number, got NaN');
  requirePositive('a', a);
  requirePositive('b', b);
}

/** P(X <= x) for X beta distributed with shapes a and b. */
export function betaCdf(x: number, a: number, b: number): number {
  requireShape(x, a, b);
  return incompleteBeta(a, b, x, 1 - x).lower;
}

/** P(X > x) for X beta distributed with shapes a and b. */
export function betaUpper(x: number, a: number, b: number): number {
  requireShape(x, a, b);
  return incompleteBeta(a, b, x, 1 - x).upper;
}

/** x with P(X <= x) = p for shapes a and b. */
export function betaQuantile(p: number, a: number, b: number): number {
  requireOpenUnit('p', p);
  requireShape(0, a, b);
  return 1 / (1 + Math.exp(-betaLogitQuantile(a, b, p, 'lower')));
}

/** x with P(X > x) = q for shapes a and b. */
export function betaUpperQuantile(q: number, a: number, b: number): number {
  requireOpenUnit('q', q);
  requireShape(0, a, b);
  return 1 / (1 + Math.exp(-betaLogitQuantile(a, b, q, 'upper')));
}
