import { type Numbers, requireCount, requireOpenUnit } from './arguments.ts';
import { binomialCdf, binomialPmf, clopperPearson } from './distributions/binomial.ts';
import { chiSquaredUpper } from './distributions/chi-squared.ts';
import type { Interval } from './intervals.ts';

export interface McnemarOptions {
  /** Confidence level of the intervals; 0.95 unless changed. */
  level?: number;
}

export interface McnemarResult {
  onlyA: number;
  onlyB: number;
  /** onlyA + onlyB, the pairs that decide. */
  n: number;
  /** Exact two-sided binomial p. */
  p: number;
  /** Two-sided mid-p: the exact p less the chance of the counts seen. */
  midP: number;
  /** onlyA / n, null when nothing was heard on one side only. */
  share: number | null;
  /** Clopper-Pearson interval of the share. */
  shareInterval: Interval | null;
  /** Conditional odds ratio onlyA / onlyB; null when onlyB is 0 (no upper bound) or n is 0. */
  oddsRatio: number | null;
  /** From the share's interval, s / (1 - s); the upper end is null when there is none. */
  interval: [lo: number, hi: number | null] | null;
  level: number;
  chiSquared: { statistic: number; p: number } | null;
  /** With Edwards' continuity correction. */
  chiSquaredCorrected: { statistic: number; p: number } | null;
}

/**
 * McNemar's test of heard-only counts: is A alone as often as B?
 *
 * Given n = onlyA + onlyB, onlyA is binomial with chance 1/2 if neither hears more. Exact p = 2 P(X <=
 * smaller count), at most 1; mid-p = that less P(X = smaller count) (1 - P / 2 when both are equal);
 * chi-squared = (onlyA - onlyB)^2 / n with one degree of freedom, corrected (|onlyA - onlyB| - 1)^2 / n.
 * Sources: McNemar (1947); Edwards (1948); mid-p in Fagerland, Lydersen and Laake (2013), BMC Med.
 * Res. Methodol. 13:91; interval Clopper and Pearson (1934) on the share. Equals R mcnemar.test and
 * binom.test. O(sqrt(n)). Both counts 0: p and midP are 1, all else null.
 *
 * @param onlyA clusters heard on A only, a whole number
 * @param onlyB clusters heard on B only
 * @throws RangeError naming `onlyA`, `onlyB` or `level`
 * @example mcnemar(86, 150).oddsRatio // 0.5733
 */
export function mcnemar(onlyA: number, onlyB: number, options: McnemarOptions = {}): McnemarResult {
  const level = options.level ?? 0.95;
  requireCount('onlyA', onlyA);
  requireCount('onlyB', onlyB);
  requireOpenUnit('level', level);
  const n = onlyA + onlyB;
  const counts = { onlyA, onlyB, n, level };
  if (n === 0) {
    return {
      ...counts,
      p: 1,
      midP: 1,
      share: null,
      shareInterval: null,
      oddsRatio: null,
      interval: null,
      chiSquared: null,
      chiSquaredCorrected: null,
    };
  }
  const smaller = Math.min(onlyA, onlyB);
  const here = binomialPmf(smaller, n, 0.5);
  const twice = 2 * binomialCdf(smaller, n, 0.5);
  const [low, high] = clopperPearson(onlyA, n, level);
  const gap = Math.abs(onlyA - onlyB);
  const chiSquared = (distance: number) => {
    const statistic = distance ** 2 / n;
    return { statistic, p: chiSquaredUpper(statistic, 1) };
  };
  return {
    ...counts,
    p: Math.min(1, twice),
    midP: gap === 0 ? 1 - here / 2 : twice - here,
    share: onlyA / n,
    shareInterval: [low, high],
    oddsRatio: onlyB === 0 ? null : onlyA / onlyB,
    interval: [low / (1 - low), high === 1 ? null : high / (1 - high)],
    chiSquared: chiSquared(gap),
    chiSquaredCorrected: chiSquared(Math.max(0, gap - 1)),
  };
}

/**
 * Heard-only events counted once per cluster, by majority: many blocks of one station in one night
 * are one piece of evidence.
 *
 * @param sides per event: above 0 heard on A only, below 0 on B only (0 counts for neither)
 * @param clusters per event its dense cluster id (see clusterIds)
 * @returns clusters with a majority for A, for B, and with as many of both
 * @throws RangeError when the lengths differ or an entry is not usable
 * @example majorityByCluster([1, 1, -1, -1], [0, 0, 0, 1]) // { onlyA: 1, onlyB: 1, tied: 0 }
 */
export function majorityByCluster(
  sides: Numbers,
  clusters: Numbers,
): { onlyA: number; onlyB: number; tied: number } {
  if (sides.length !== clusters.length) {
    throw new RangeError(
      `sides and clusters must have equal lengths, got ${sides.length} and ${clusters.length}`,
    );
  }
  const balance = new Map<number, number>();
  for (let i = 0; i < sides.length; i++) {
    const side = sides[i]!;
    if (Number.isNaN(side)) throw new RangeError(`sides must hold numbers, entry ${i} is NaN`);
    requireCount('clusters', clusters[i]!);
    balance.set(clusters[i]!, (balance.get(clusters[i]!) ?? 0) + Math.sign(side));
  }
  const result = { onlyA: 0, onlyB: 0, tied: 0 };
  for (const sum of balance.values()) result[sum > 0 ? 'onlyA' : sum < 0 ? 'onlyB' : 'tied'] += 1;
  return result;
}
