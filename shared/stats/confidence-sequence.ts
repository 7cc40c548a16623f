import { type Numbers, requireCount, requireNumbers, requireOpenUnit, requirePositive } from './arguments.ts';
import type { Interval } from './intervals.ts';

export interface ConfidenceSequenceOptions {
  /** Share of trials in which the truth never leaves the interval; 0.95 unless changed. */
  level?: number;
  /** Parameter of the mixing normal, > 0. Must not depend on the values. Give this or `tunedFor`. */
  rho?: number;
  /** rho is chosen so that the interval is narrowest at this time; 200 unless changed. */
  tunedFor?: number;
  /** First time with an interval, at least 2; 8 unless changed (see confidenceSequence). */
  from?: number;
  /** Each interval is cut to what all earlier ones agree on; false unless changed. */
  runningIntersection?: boolean;
}

export interface ConfidencePoint {
  /** Values so far. */
  t: number;
  /** Their mean. */
  estimate: number;
  /** Null before `from`, while all values are equal, and when the running intersection is empty. */
  interval: Interval | null;
}

export interface ConfidenceSequenceResult {
  n: number;
  /** Mean of all values. */
  estimate: number;
  /** The last interval. */
  interval: Interval | null;
  level: number;
  rho: number;
  /** Time at which the interval is narrowest for its rho. */
  tunedFor: number;
  /** One per time, 1 ... n. */
  line: ConfidencePoint[];
  /** First time at which zero was outside; null when it never was. */
  excludesZeroAt: number | null;
}

/** Clusters before which no verdict speaks, and no interval is drawn. */
export const confidenceSequenceStart = 8;

/** Clusters of a trial of some nights. */
const usualTuning = 200;

/** t rho^2 at which the interval is narrowest: the x > 0 with x - log(1 + x) = -2 log(alpha). */
function narrowestAt(alpha: number): number {
  const goal = -2 * Math.log(alpha);
  // Convex and increasing: from the right Newton comes down on the root without crossing it.
  let x = goal + Math.log1p(goal) + Math.SQRT2 * Math.sqrt(goal) + 1;
  for (let i = 0; i < 100; i++) {
    const step = ((x - Math.log1p(x) - goal) * (1 + x)) / x;
    x -= step;
    if (Math.abs(step) <= 1e-15 * x) break;
  }
  return x;
}

/**
 * The rho for which the confidence sequence is narrowest at time t.
 *
 * The squared width is (1 + 1/x) log((1 + x) / alpha^2) over t, with x = t rho^2; its slope is zero where
 * 1 + x = alpha^2 e^x, that is x = -W(-alpha^2 / e) - 1 on the lower branch of Lambert's function, found
 * here by Newton's method. Waudby-Smith et al. (2021), appendix on tuning. O(1).
 *
 * @param t time, > 0
 * @param alpha 1 - level, in (0, 1)
 * @throws RangeError naming the argument
 * @example tunedRho(50, 0.05) // 0.405
 */
export function tunedRho(t: number, alpha: number): number {
  requirePositive('t', t);
  requireOpenUnit('alpha', alpha);
  return Math.sqrt(narrowestAt(alpha) / t);
}

/**
 * Half the width of the confidence sequence at time t for a standard deviation of 1:
 * sqrt(2 (t rho^2 + 1) / (t^2 rho^2) log(sqrt(t rho^2 + 1) / alpha)).
 *
 * @throws RangeError naming the argument
 */
export function confidenceSequenceReach(t: number, rho: number, alpha: number): number {
  requirePositive('t', t);
  requirePositive('rho', rho);
  requireOpenUnit('alpha', alpha);
  const x = t * rho * rho;
  return Math.sqrt(((2 * (x + 1)) / (t * x)) * (0.5 * Math.log1p(x) - Math.log(alpha)));
}

/**
 * An interval that may be looked at after every value and acted upon at any of them: with the stated
 * chance the true mean lies in all of its intervals at once, so stopping when one likes what one sees
 * does no harm.
 *
 * mean_t +- sd_t sqrt(2 (t rho^2 + 1) / (t^2 rho^2) log(sqrt(t rho^2 + 1) / alpha)), alpha = 1 - level, mean_t
 * and sd_t (divisor t - 1) of the first t values by Welford's updates. Source: Waudby-Smith, Arbour,
 * Sinha, Kennedy and Ramdas (2021), Time-uniform central limit theory and asymptotic confidence
 * sequences, arXiv:2103.06476, theorem 2.2; Robbins (1970), normal mixture. rho: see tunedRho.
 *
 * The promise is asymptotic. The first few values know their own spread badly: in 10,000 simulated trials
 * of 1,000 normal values the 95 % interval left the truth in 4 % when drawn from 8 values on and tuned for
 * 200, in 6 % tuned for 50, and drawn from 2 on in 20 %; with exponential (very skewed) values in 11 % at
 * best. So it starts at `from` values, 8 being also where a verdict may first speak. Values should be
 * independent of each other: one mean per (call sign, night) in the order of time.
 *
 * `runningIntersection` is as safe and never wider, but may lose the current mean, and becomes empty (null
 * from then on) when the mean has drifted away from where it was. O(n).
 *
 * @param values cluster means in the order of time, dB
 * @throws RangeError naming `values`, `level`, `rho`, `tunedFor` or `from`: empty, not finite, level
 *   outside (0, 1), rho and tunedFor both given or not positive, from below 2
 * @example confidenceSequence([1, 2, 1.5, 1, 2, 3, 1, 2, 1.4], { tunedFor: 20 }).interval
 */
export function confidenceSequence(
  values: Numbers,
  options: ConfidenceSequenceOptions = {},
): ConfidenceSequenceResult {
  const { level = 0.95, from = confidenceSequenceStart, runningIntersection = false } = options;
  requireNumbers('values', values);
  requireOpenUnit('level', level);
  requireCount('from', from);
  if (from < 2) throw new RangeError(`from must be at least 2, got ${from}`);
  if (options.rho !== undefined && options.tunedFor !== undefined) {
    throw new RangeError('rho and tunedFor exclude each other, give one of them');
  }
  if (options.rho !== undefined) requirePositive('rho', options.rho);
  requirePositive('tunedFor', options.tunedFor ?? usualTuning);
  const alpha = 1 - level;
  const rho = options.rho ?? tunedRho(options.tunedFor ?? usualTuning, alpha);
  const tunedFor = options.tunedFor ?? narrowestAt(alpha) / (rho * rho);

  const n = values.length;
  const line: ConfidencePoint[] = [];
  let [mean, squares, largest] = [0, 0, 0];
  let [lo, hi] = [-Infinity, Infinity];
  let excludesZeroAt: number | null = null;
  for (let t = 1; t <= n; t++) {
    const value = values[t - 1]!;
    const step = value - mean;
    mean += step / t;
    squares += step * (value - mean);
    largest = Math.max(largest, Math.abs(value));
    const sd = t < 2 ? 0 : Math.sqrt(squares / (t - 1));
    let interval: Interval | null = null;
    // A spread below the arithmetic's own noise is no spread.
    if (t >= from && sd > largest * 1e-14) {
      const reach = sd * confidenceSequenceReach(t, rho, alpha);
      interval = [mean - reach, mean + reach];
      if (runningIntersection) {
        lo = Math.max(lo, interval[0]);
        hi = Math.min(hi, interval[1]);
        interval = lo <= hi ? [lo, hi] : null;
      }
    }
    if (interval && excludesZeroAt === null && (interval[0] > 0 || interval[1] < 0)) excludesZeroAt = t;
    line.push({ t, estimate: mean, interval });
  }
  return { n, estimate: mean, interval: line[n - 1]!.interval, level, rho, tunedFor, line, excludesZeroAt };
}
