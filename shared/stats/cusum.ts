import { type Numbers, requireFinite, requireNumbers, requirePositive } from './arguments.ts';

export interface CusumOptions {
  /** Mean while nothing has changed, unit of the values. */
  target: number;
  /** Allowance: half the shift to be found quickly; 0 or more, unit of the values. */
  k: number;
  /** Alarm when a sum is above this, > 0; four to five standard deviations of a value are usual. */
  h: number;
  /** Both sums start at h / 2 instead of 0, to find a shift that was there from the start; false unless changed. */
  fastInitialResponse?: boolean;
  /** Start both sums anew after an alarm; false unless changed. */
  restart?: boolean;
}

export interface CusumAlarm {
  /** Position in the values, from 0. */
  index: number;
  /** `high`: the mean has risen above the target. */
  side: 'high' | 'low';
  /** Where the sum last left zero: the likeliest start of the change. */
  since: number;
}

export interface CusumResult {
  /** Sum of what the values had above target + k, never below 0; one per value. */
  high: number[];
  /** Sum of what they lacked below target - k. */
  low: number[];
  /** Each time a sum climbed above h. */
  alarms: CusumAlarm[];
  firstAlarmIndex: number | null;
}

/**
 * Tabular CUSUM: has the mean shifted, and since when?
 *
 * high_i = max(0, high_{i-1} + x_i - target - k), low_i = max(0, low_{i-1} + target - k - x_i), alarm when
 * either is above h. Sources: Page (1954), Biometrika 41; NIST/SEMATECH e-Handbook 6.3.2.3; head start Lucas
 * and Crosier (1982), Technometrics 24. O(n).
 *
 * @param values in the order of time, finite
 * @throws RangeError naming `values`, `target`, `k` or `h`: empty, not finite, k negative, h not positive
 * @example cusum([0, 0, 2, 2, 2], { target: 0, k: 0.5, h: 4 }).firstAlarmIndex // 4
 */
export function cusum(values: Numbers, options: CusumOptions): CusumResult {
  const { target, k, h, fastInitialResponse = false, restart = false } = options;
  requireNumbers('values', values);
  requireFinite('target', target);
  requireFinite('k', k);
  if (k < 0) throw new RangeError(`k must be 0 or more, got ${k}`);
  requirePositive('h', h);
  const start = fastInitialResponse ? h / 2 : 0;
  const alarms: CusumAlarm[] = [];
  const side = (name: 'high' | 'low') => ({ name, sum: start, since: 0, above: start > h });
  const both = [side('high'), side('low')];
  const sums: Record<'high' | 'low', number[]> = { high: [], low: [] };
  for (let i = 0; i < values.length; i++) {
    for (const one of both) {
      const distance = one.name === 'high' ? values[i]! - target : target - values[i]!;
      if (one.sum === 0) one.since = i;
      one.sum = Math.max(0, one.sum + distance - k);
      sums[one.name].push(one.sum);
      const above = one.sum > h;
      if (above && !one.above) alarms.push({ index: i, side: one.name, since: one.since });
      one.above = above;
    }
    if (restart && both.some(({ above }) => above)) {
      for (const one of both) [one.sum, one.since, one.above] = [start, i + 1, false];
    }
  }
  return { ...sums, alarms, firstAlarmIndex: alarms[0]?.index ?? null };
}
