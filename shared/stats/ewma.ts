import { type Numbers, requireFinite, requireNumbers, requirePositive } from './arguments.ts';
import type { Interval } from './intervals.ts';

export interface EwmaOptions {
  /** Weight of the newest value, above 0 up to 1; 0.2 unless changed. */
  lambda?: number;
  /** Mean while nothing has changed, unit of the values. */
  center: number;
  /** Standard deviation of one value, > 0. */
  sd: number;
  /** Distance of the limits in standard errors, > 0; 3 unless changed. */
  k?: number;
  /** Limits the alarms go by: those of each time, or those they tend to; `exact` unless changed. */
  limits?: 'exact' | 'asymptotic';
}

export interface EwmaResult {
  /** Weighted mean after each value. */
  ewma: number[];
  /** Limits of each time, which widen toward the asymptotic ones. */
  lower: number[];
  upper: number[];
  asymptotic: Interval;
  /** Each time the mean left the limits. */
  alarms: { index: number; side: 'high' | 'low' }[];
  firstAlarmIndex: number | null;
}

/**
 * Exponentially weighted moving average with control limits: a small lasting shift shows sooner than in
 * single values.
 *
 * z_i = lambda x_i + (1 - lambda) z_{i-1}, z_0 = center; limits center +- k sd sqrt(lambda / (2 - lambda) (1 -
 * (1 - lambda)^(2 i))), without the last factor asymptotic. Sources: Roberts (1959), Technometrics 1;
 * NIST/SEMATECH e-Handbook 6.3.2.4. O(n).
 *
 * @param values in the order of time, finite
 * @throws RangeError naming `values`, `lambda`, `center`, `sd`, `k` or `limits`
 * @example ewma([1, 1], { lambda: 0.5, center: 0, sd: 1 }).ewma // [0.5, 0.75]
 */
export function ewma(values: Numbers, options: EwmaOptions): EwmaResult {
  const { lambda = 0.2, center, sd, k = 3, limits = 'exact' } = options;
  requireNumbers('values', values);
  if (!(lambda > 0 && lambda <= 1)) {
    throw new RangeError(`lambda must be above 0 and at most 1, got ${lambda}`);
  }
  requireFinite('center', center);
  requirePositive('sd', sd);
  requirePositive('k', k);
  if (limits !== 'exact' && limits !== 'asymptotic') {
    throw new RangeError("limits must be 'exact' or 'asymptotic'");
  }
  const n = values.length;
  const means: number[] = [];
  const lower: number[] = [];
  const upper: number[] = [];
  const widest = k * sd * Math.sqrt(lambda / (2 - lambda));
  const alarms: EwmaResult['alarms'] = [];
  let mean = center;
  let before: 'high' | 'low' | null = null;
  for (let i = 0; i < n; i++) {
    mean += lambda * (values[i]! - mean);
    const reach = widest * Math.sqrt(-Math.expm1(2 * (i + 1) * Math.log1p(-lambda)));
    means.push(mean);
    lower.push(center - reach);
    upper.push(center + reach);
    const allowed = limits === 'exact' ? reach : widest;
    const side = mean > center + allowed ? 'high' : mean < center - allowed ? 'low' : null;
    if (side && side !== before) alarms.push({ index: i, side });
    before = side;
  }
  const asymptotic: Interval = [center - widest, center + widest];
  return { ewma: means, lower, upper, asymptotic, alarms, firstAlarmIndex: alarms[0]?.index ?? null };
}
