import { requireOpenUnit, requirePositive } from './arguments.ts';
import { noncentralTCdf, noncentralTUpper } from './distributions/noncentral-t.ts';
import { normalQuantile } from './distributions/normal.ts';
import { solveBracketed } from './distributions/solve.ts';
import { tUpperQuantile } from './distributions/student.ts';

interface Spread {
  /** Standard deviation of one value, dB; of clusters: standard error times sqrt(clusters). */
  sd: number;
  /** Confidence level; the test is two-sided at alpha = 1 - level. 0.95 unless changed. */
  level?: number;
  /** Also count rejections on the wrong side as power; false unless changed, as in R. */
  bothTails?: boolean;
}

/** What is known; the rest is worked out. */
export type SampleSizeQuestion = Spread &
  (
    | { difference: number; power: number; n?: undefined; halfWidth?: undefined }
    | { difference: number; n: number; power?: undefined; halfWidth?: undefined }
    | { n: number; power: number; difference?: undefined; halfWidth?: undefined }
    | { halfWidth: number; difference?: undefined; power?: undefined; n?: undefined }
    | { n: number; halfWidth?: undefined; difference?: undefined; power?: undefined }
  );

export interface SampleSizeResult {
  /** Values (clusters), not rounded; at least 2. */
  n: number;
  /** The next whole number of values. */
  whole: number;
  sd: number;
  level: number;
  /** True mean difference that the power is for; null when none was asked. */
  difference: number | null;
  power: number | null;
  /** Half-width of the interval that n values give, t quantile * sd / sqrt(n). */
  halfWidth: number;
}

/** More values than this are no plan. */
const mostValues = 1e12;

/**
 * How many values a paired t test or interval needs, or what a given number of them can show.
 *
 * Power against a true difference: P(T > t) with T noncentral t, n - 1 degrees of freedom, noncentrality
 * sqrt(n) difference / sd, t the two-sided critical value; `bothTails` adds P(T < -t). Half-width: t
 * sd / sqrt(n). n is solved for as a real number from 2 up (2 when even that is more than enough). Sources:
 * Student (1908); Owen (1965), Biometrika 52. Equals R power.t.test(type = "paired"), strict = bothTails.
 * Some twenty evaluations of the noncentral t, below a millisecond.
 *
 * @param question sd with difference and power (gives n), difference and n (gives power), n and power
 *   (gives the detectable difference), halfWidth (gives n), or n alone (gives the half-width); dB
 * @throws RangeError naming the argument: not positive, level or power outside (0, 1), power not above
 *   alpha / 2 (alpha with bothTails; any difference has that), n below 2 or beyond 1e12, another
 *   combination of arguments
 * @example sampleSize({ sd: 4, difference: 1, power: 0.8 }).n // 127.516
 */
export function sampleSize(question: SampleSizeQuestion): SampleSizeResult {
  const { sd, level = 0.95, bothTails = false, difference, power, n, halfWidth } = question;
  requirePositive('sd', sd);
  requireOpenUnit('level', level);
  if (difference !== undefined) requirePositive('difference', difference);
  if (halfWidth !== undefined) requirePositive('halfWidth', halfWidth);
  if (n !== undefined && !(n >= 2 && n <= mostValues)) {
    throw new RangeError(`n must lie between 2 and ${mostValues}, got ${n}`);
  }
  const alpha = 1 - level;
  if (power !== undefined) {
    requireOpenUnit('power', power);
    const least = bothTails ? alpha : alpha / 2;
    if (power <= least) throw new RangeError(`power must be above ${least}, got ${power}`);
  }

  const critical = (values: number) => tUpperQuantile(alpha / 2, values - 1);
  const widthAt = (values: number) => (critical(values) * sd) / Math.sqrt(values);
  const powerAt = (values: number, gap: number) => {
    const t = critical(values);
    const shift = (Math.sqrt(values) * gap) / sd;
    const right = noncentralTUpper(t, values - 1, shift);
    return bothTails ? right + noncentralTCdf(-t, values - 1, shift) : right;
  };
  /** The n from 2 up at which an increasing function of it reaches zero. */
  const smallest = (name: string, enough: (values: number) => number): number => {
    let [low, high] = [2, 4];
    while (enough(high) < 0) {
      [low, high] = [high, 4 * high];
      if (high > mostValues) throw new RangeError(`${name} asks for more than ${mostValues} values`);
    }
    return solveBracketed(enough, low, high);
  };
  const answer = (values: number, gap: number | null, chance: number | null): SampleSizeResult => ({
    n: values,
    // A root found a rounding error above a whole number is that number.
    whole: Math.ceil(values - 1e-9 * values),
    sd,
    level,
    difference: gap,
    power: chance,
    halfWidth: widthAt(values),
  });

  const given = [difference, power, n, halfWidth].filter((value) => value !== undefined).length;
  if (difference !== undefined && power !== undefined && given === 2) {
    const values = smallest('difference', (count) => powerAt(count, difference) - power);
    return answer(values, difference, powerAt(values, difference));
  }
  if (difference !== undefined && n !== undefined && given === 2) {
    return answer(n, difference, powerAt(n, difference));
  }
  if (n !== undefined && power !== undefined && given === 2) {
    // A first guess; whatever it is, doubling brackets the root.
    let gap = (Math.max(1, critical(n) + normalQuantile(power)) * sd) / Math.sqrt(n);
    let low = 0;
    while (powerAt(n, gap) < power) [low, gap] = [gap, 2 * gap];
    const found = solveBracketed((tried) => powerAt(n, tried) - power, low, gap);
    return answer(n, found, powerAt(n, found));
  }
  if (halfWidth !== undefined && given === 1) {
    return answer(
      smallest('halfWidth', (count) => halfWidth - widthAt(count)),
      null,
      null,
    );
  }
  if (n !== undefined && given === 1) return answer(n, null, null);
  throw new RangeError('give difference and power, difference and n, n and power, halfWidth, or n');
}
