import { requireOpenUnit, requirePositive } from '../arguments.ts';
import type { Tails } from './beta.ts';
import { continuedFraction } from './continued-fraction.ts';
import { poissonKernel } from './kernels.ts';
import { solveIncreasing } from './solve.ts';

/**
 * Regularised incomplete gamma functions P(a, x) and Q(a, x), a > 0, x >= 0.
 *
 * Source: DLMF 8.11.4 (series, below the mean) and 8.9.2 (continued fraction, above); front factor by
 * Loader (2000). O(sqrt(a)).
 */
export function incompleteGamma(a: number, x: number): Tails {
  if (x <= 0) return { lower: 0, upper: 1 };
  if (x === Infinity) return { lower: 1, upper: 0 };
  const front = poissonKernel(a, x);
  if (x < a + 1) {
    let term = 1;
    let sum = 1;
    for (let i = 1; term > sum * 1e-17; i++) {
      term *= x / (a + i);
      sum += term;
    }
    const lower = front * sum;
    return { lower, upper: 1 - lower };
  }
  const fraction = continuedFraction(x + 1 - a, (i) => [-i * (i - a), x + 2 * i + 1 - a]);
  const upper = (front * a) / fraction;
  return { lower: 1 - upper, upper };
}

function tails(x: number, df: number): Tails {
  if (Number.isNaN(x)) throw new RangeError('x must be a number, got NaN');
  requirePositive('df', df);
  return incompleteGamma(df / 2, x / 2);
}

/** P(X <= x) for chi-squared with df degrees of freedom. */
export function chiSquaredCdf(x: number, df: number): number {
  return tails(x, df).lower;
}

/** P(X > x), the tail itself. */
export function chiSquaredUpper(x: number, df: number): number {
  return tails(x, df).upper;
}

function quantile(probability: number, df: number, tail: 'lower' | 'upper'): number {
  requirePositive('df', df);
  const a = df / 2;
  const small = probability <= 0.5;
  const side = small ? tail : tail === 'lower' ? 'upper' : 'lower';
  const direction = side === 'lower' ? 1 : -1;
  const goal = Math.log(small ? probability : 1 - probability);
  const logHalf = solveIncreasing(
    (u) => {
      const half = Math.exp(u);
      const reached = incompleteGamma(a, half)[side];
      if (reached === 0) return [-direction * Number.MAX_VALUE, 1];
      return [direction * (Math.log(reached) - goal), (a * poissonKernel(a, half)) / reached];
    },
    -744,
    700,
    Math.log(a),
  );
  return 2 * Math.exp(logHalf);
}

/** x with P(X <= x) = p. */
export function chiSquaredQuantile(p: number, df: number): number {
  requireOpenUnit('p', p);
  return quantile(p, df, 'lower');
}

/** x with P(X > x) = q. */
export function chiSquaredUpperQuantile(q: number, df: number): number {
  requireOpenUnit('q', q);
  return quantile(q, df, 'upper');
}
