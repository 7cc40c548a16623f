import { requireCount, requireOpenUnit, requireUnit } from '../arguments.ts';
import { betaQuantile, betaUpperQuantile, incompleteBeta } from './beta.ts';
import { binomialKernel } from './kernels.ts';
import { normalQuantile } from './normal.ts';

function requireBinomial(n: number, p: number): void {
  requireCount('n', n);
  requireUnit('p', p);
}

/** P(X = k) for n trials with chance p. */
export function binomialPmf(k: number, n: number, p: number): number {
  requireBinomial(n, p);
  return Number.isInteger(k) && k >= 0 && k <= n ? binomialKernel(k, n, p, 1 - p) : 0;
}

/** P(X <= k) for n trials with chance p. */
export function binomialCdf(k: number, n: number, p: number): number {
  requireBinomial(n, p);
  const whole = Math.floor(k);
  if (whole < 0) return 0;
  return whole >= n ? 1 : incompleteBeta(whole + 1, n - whole, p, 1 - p).upper;
}

/** P(X > k) for n trials with chance p, the tail itself. */
export function binomialUpper(k: number, n: number, p: number): number {
  requireBinomial(n, p);
  const whole = Math.floor(k);
  if (whole < 0) return 1;
  return whole >= n ? 0 : incompleteBeta(whole + 1, n - whole, p, 1 - p).lower;
}

/** Smallest k with P(X <= k) >= probability. O(log n) tails. */
export function binomialQuantile(probability: number, n: number, p: number): number {
  requireOpenUnit('probability', probability);
  requireBinomial(n, p);
  // A rounding error must not move the answer by one where the sum hits the probability exactly.
  const goal = probability * (1 - 64 * Number.EPSILON);
  const guess = Math.round(n * p + normalQuantile(probability) * Math.sqrt(n * p * (1 - p)));
  let low = -1;
  let high = n;
  let k = Math.min(Math.max(guess, 0), n);
  for (let width = 1; high - low > 1; width *= 2) {
    if (binomialCdf(k, n, p) >= goal) high = k;
    else low = k;
    const next = high === k ? k - width : k + width;
    k = next > low && next < high ? next : (low + high) >> 1;
  }
  return high;
}

/**
 * Exact two-sided interval for a share (Clopper and Pearson 1934): each tail holds at most half of
 * 1 - level. Equals R binom.test.
 *
 * @param successes whole number from 0 to trials
 * @param trials whole number from 1
 * @throws RangeError naming the argument
 * @example clopperPearson(9, 10, 0.95) // [0.55498, 0.99747]
 */
export function clopperPearson(successes: number, trials: number, level: number): [number, number] {
  requireCount('trials', trials);
  requireCount('successes', successes);
  requireOpenUnit('level', level);
  if (trials < 1) throw new RangeError('trials must be at least 1');
  if (successes > trials) throw new RangeError('successes must not exceed trials');
  const alpha = (1 - level) / 2;
  return [
    successes === 0 ? 0 : betaQuantile(alpha, successes, trials - successes + 1),
    successes === trials ? 1 : betaUpperQuantile(alpha, successes + 1, trials - successes),
  ];
}
