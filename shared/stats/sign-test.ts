import { type Numbers, readPairs, requireOpenUnit, roundTo } from './arguments.ts';
import { binomialCdf, binomialUpper, clopperPearson } from './distributions/binomial.ts';
import type { Interval } from './intervals.ts';

export interface SignTestOptions {
  /** Confidence level of the interval; 0.95 unless changed. */
  level?: number;
  /** Differences are first rounded to a multiple of this (dB); 0, the default, keeps them. */
  resolution?: number;
}

export interface SignTestResult {
  /** All differences, ties included. */
  n: number;
  positive: number;
  negative: number;
  ties: number;
  /** Chance that A beats B, a tie counting as half. */
  chance: number;
  /** Share of positive among non-zero differences, null when all are zero. */
  share: number | null;
  /** Clopper-Pearson interval of the share. */
  interval: Interval | null;
  level: number;
  /** Two-sided. */
  p: number;
  /** One-sided, against "more than half are positive". */
  pGreater: number;
  /** One-sided, against "more than half are negative". */
  pLess: number;
}

/**
 * Sign test: the exact binomial test that half of the non-zero differences are positive.
 *
 * p = min(1, 2 * smaller tail) of a binomial with chance 1/2; `chance` = (positive + ties / 2) / n
 * (the probability of superiority for pairs, Grissom and Kim 2005). Sources: Arbuthnott (1710); Clopper
 * and Pearson (1934). Equals R binom.test(positive, positive + negative). O(n). All differences zero: every p is 1,
 * share and interval are null.
 *
 * @param args differences (dB), or two lists a and b of equal length whose differences a - b count;
 *   then options
 * @throws RangeError naming `differences`, `a`, `b`, `level` or `resolution`
 * @example signTest([1, 2, -1, 0]).chance // 0.625
 */
export function signTest(differences: Numbers, options?: SignTestOptions): SignTestResult;
export function signTest(a: Numbers, b: Numbers, options?: SignTestOptions): SignTestResult;
export function signTest(
  ...args: [Numbers, SignTestOptions?] | [Numbers, Numbers, SignTestOptions?]
): SignTestResult {
  const { differences: raw, options } = readPairs<SignTestOptions>(args, 1);
  const level = options.level ?? 0.95;
  requireOpenUnit('level', level);
  const differences = roundTo(raw, options.resolution ?? 0);
  let positive = 0;
  let negative = 0;
  for (const difference of differences) {
    if (difference > 0) positive += 1;
    else if (difference < 0) negative += 1;
  }
  const n = differences.length;
  const ties = n - positive - negative;
  const counts = { n, positive, negative, ties, chance: (positive + ties / 2) / n, level };
  const decided = positive + negative;
  if (decided === 0) return { ...counts, share: null, interval: null, p: 1, pGreater: 1, pLess: 1 };
  const pGreater = binomialUpper(positive - 1, decided, 0.5);
  const pLess = binomialCdf(positive, decided, 0.5);
  return {
    ...counts,
    share: positive / decided,
    interval: clopperPearson(positive, decided, level),
    p: Math.min(1, 2 * Math.min(pGreater, pLess)),
    pGreater,
    pLess,
  };
}
