import type { Random } from './random.ts';

/** Cholesky factor of a matrix that may be singular, the largest remaining diagonal first; row-major. O(m^3). */
function semidefiniteFactor(covariance: Float64Array, m: number): Float64Array {
  const rest = covariance.slice();
  const factor = new Float64Array(m * m);
  const largest = Math.max(...Array.from({ length: m }, (_, i) => covariance[i * m + i]!));
  for (let step = 0; step < m; step++) {
    let best = 0;
    for (let i = 1; i < m; i++) if (rest[i * m + i]! > rest[best * m + best]!) best = i;
    const pivot = rest[best * m + best]!;
    if (!(pivot > 1e-13 * largest)) break;
    const scale = Math.sqrt(pivot);
    for (let i = 0; i < m; i++) factor[i * m + step] = rest[i * m + best]! / scale;
    for (let i = 0; i < m; i++) {
      for (let j = 0; j < m; j++) rest[i * m + j]! -= factor[i * m + step]! * factor[j * m + step]!;
    }
  }
  return factor;
}

/**
 * How often each of several values is the highest, by draws from their joint normal distribution.
 * O(draws * m^2).
 *
 * @param values means, dB
 * @param covariance row-major m by m, dB^2; may be singular
 * @returns one share a value, together 1
 */
export function chancesOfBest(
  values: readonly number[],
  covariance: Float64Array,
  draws: number,
  random: Random,
): number[] {
  const m = values.length;
  const factor = semidefiniteFactor(covariance, m);
  const wins = new Int32Array(m);
  const normal = new Float64Array(m);
  for (let draw = 0; draw < draws; draw++) {
    for (let j = 0; j < m; j++) normal[j] = random.normal();
    let best = 0;
    let highest = -Infinity;
    for (let i = 0; i < m; i++) {
      let value = values[i]!;
      for (let j = 0; j < m; j++) value += factor[i * m + j]! * normal[j]!;
      if (value > highest) [best, highest] = [i, value];
    }
    wins[best]! += 1;
  }
  return Array.from(wins, (count) => count / draws);
}
