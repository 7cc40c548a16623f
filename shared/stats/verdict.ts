import { requireCount, requireFinite, requirePositive } from './arguments.ts';
import type { Interval } from './intervals.ts';

export type VerdictCode =
  | 'a-clearly-better'
  | 'a-better'
  | 'b-clearly-better'
  | 'b-better'
  | 'no-practical-difference'
  | 'not-settled'
  | 'not-enough-yet'
  | 'cannot-be-separated';

export interface VerdictInput {
  /** dB, above 0 meaning A hears better; null when it cannot be estimated. */
  estimate: number | null;
  /** 95 % cluster interval, dB; null when the data bear none. */
  interval: Interval | null;
  /** 90 % cluster interval, dB. */
  interval90: Interval | null;
  /** (call sign, night) clusters that carry the estimate. */
  clusters: number;
  nights: number;
  /** Smallest difference that matters, dB; 1 unless changed. */
  margin?: number;
  /** False when the antennas' difference is tangled with the receivers' (page "cannot be separated"). */
  separable: boolean;
  /** Fewest clusters for any verdict; 8 unless changed. */
  minClusters?: number;
  /** Fewest nights for any verdict; 3 unless changed. */
  minNights?: number;
}

export interface Verdict {
  code: VerdictCode;
  /** The antenna that hears better, null when neither is shown to. */
  better: 'A' | 'B' | null;
  /**
   * The 90 % interval lies inside (-margin, margin). Can be true beside "better": shown to differ, and
   * shown that the difference is too small to matter.
   */
  withinMargin: boolean;
}

function requireInterval(name: string, interval: Interval | null): void {
  if (interval === null) return;
  requireFinite(`${name}[0]`, interval[0]);
  requireFinite(`${name}[1]`, interval[1]);
  if (interval[0] > interval[1]) throw new RangeError(`${name} must run from low to high`);
}

/**
 * The verdict of a comparison, the first that applies: cannot be separated; not enough yet (fewer than 8
 * clusters or 3 nights); clearly better (the 95 % interval lies beyond the margin); better (it lies
 * beyond zero); no practical difference (the 90 % interval lies inside the margin, the two one-sided tests
 * of Schuirmann 1987); not settled. O(1).
 *
 * @throws RangeError naming the argument: not finite, an interval upside down, margin not positive
 * @example
 * verdict({ estimate: 1.8, interval: [1.1, 2.5], interval90: [1.2, 2.4], clusters: 40, nights: 9,
 *   margin: 1, separable: true }).code // 'a-clearly-better'
 */
export function verdict(input: VerdictInput): Verdict {
  const { estimate, interval, interval90, clusters, nights, separable } = input;
  const { margin = 1, minClusters = 8, minNights = 3 } = input;
  if (estimate !== null) requireFinite('estimate', estimate);
  requireInterval('interval', interval);
  requireInterval('interval90', interval90);
  requireCount('clusters', clusters);
  requireCount('nights', nights);
  requirePositive('margin', margin);

  if (!separable) return { code: 'cannot-be-separated', better: null, withinMargin: false };
  if (clusters < minClusters || nights < minNights) {
    return { code: 'not-enough-yet', better: null, withinMargin: false };
  }
  const withinMargin = interval90 !== null && interval90[0] > -margin && interval90[1] < margin;
  if (estimate !== null && interval !== null) {
    const [lo, hi] = interval;
    if (lo > margin) return { code: 'a-clearly-better', better: 'A', withinMargin };
    if (hi < -margin) return { code: 'b-clearly-better', better: 'B', withinMargin };
    if (lo > 0) return { code: 'a-better', better: 'A', withinMargin };
    if (hi < 0) return { code: 'b-better', better: 'B', withinMargin };
  }
  return { code: withinMargin ? 'no-practical-difference' : 'not-settled', better: null, withinMargin };
}
