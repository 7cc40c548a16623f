import { requireOpenUnit, requirePositive } from '../arguments.ts';
import { betaLogitQuantile, incompleteBeta } from './beta.ts';

/** Both tails of Fisher's F at f, through I_x(df1/2, df2/2), x = df1 f / (df1 f + df2). */
function tails(f: number, df1: number, df2: number) {
  if (Number.isNaN(f)) throw new RangeError('f must be a number, got NaN');
  requirePositive('df1', df1);
  requirePositive('df2', df2);
  if (f <= 0) return { lower: 0, upper: 1 };
  if (f === Infinity) return { lower: 1, upper: 0 };
  const odds = (df1 / df2) * f;
  return incompleteBeta(df1 / 2, df2 / 2, odds / (1 + odds), 1 / (1 + odds));
}

/** P(F <= f) with df1 and df2 degrees of freedom. */
export function fCdf(f: number, df1: number, df2: number): number {
  return tails(f, df1, df2).lower;
}

/** P(F > f), the tail itself. */
export function fUpper(f: number, df1: number, df2: number): number {
  return tails(f, df1, df2).upper;
}

function quantile(
  name: string,
  probability: number,
  df1: number,
  df2: number,
  tail: 'lower' | 'upper',
): number {
  requireOpenUnit(name, probability);
  requirePositive('df1', df1);
  requirePositive('df2', df2);
  return (df2 / df1) * Math.exp(betaLogitQuantile(df1 / 2, df2 / 2, probability, tail));
}

/** f with P(F <= f) = p. */
export function fQuantile(p: number, df1: number, df2: number): number {
  return quantile('p', p, df1, df2, 'lower');
}

/** f with P(F > f) = q. */
export function fUpperQuantile(q: number, df1: number, df2: number): number {
  return quantile('q', q, df1, df2, 'upper');
}
