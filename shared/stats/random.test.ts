import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { createRandom, type Random } from './random.ts';

const draws = (random: Random, count: number) => Array.from({ length: count }, () => random.uniform());

/** Largest distance between the sorted sample and a distribution function (Kolmogorov's D). */
function kolmogorovDistance(sample: number[], cdf: (x: number) => number): number {
  const sorted = [...sample].sort((a, b) => a - b);
  return sorted.reduce((worst, x, i) => {
    const f = cdf(x);
    return Math.max(worst, f - i / sorted.length, (i + 1) / sorted.length - f);
  }, 0);
}

/** 99.9 % point of Kolmogorov's D for large n (Smirnov 1948): 1.9495 / sqrt(n). */
const limit = (n: number) => 1.9495 / Math.sqrt(n);

describe('createRandom', () => {
  it('gives the same numbers for the same seed and others for another seed', () => {
    expect(draws(createRandom(42), 100)).toEqual(draws(createRandom(42), 100));
    expect(draws(createRandom(42), 100)).not.toEqual(draws(createRandom(43), 100));
  });

  it('draws uniform numbers that pass a Kolmogorov test, also across neighbouring seeds', () => {
    expect(kolmogorovDistance(draws(createRandom(1), 20_000), (x) => x)).toBeLessThan(limit(20_000));
    const firsts = Array.from({ length: 20_000 }, (_, seed) => createRandom(seed).uniform());
    expect(kolmogorovDistance(firsts, (x) => x)).toBeLessThan(limit(20_000));
  });

  it('draws exponential numbers that pass a Kolmogorov test', () => {
    const random = createRandom(5);
    const sample = Array.from({ length: 20_000 }, () => random.exponential());
    expect(kolmogorovDistance(sample, (x) => 1 - Math.exp(-x))).toBeLessThan(limit(20_000));
  });

  it('draws normal numbers whose first four moments are those of the standard normal', () => {
    const random = createRandom(6);
    const n = 100_000;
    const sums = [0, 0, 0, 0];
    for (let i = 0; i < n; i++) {
      const z = random.normal();
      for (let power = 1; power <= 4; power++) sums[power - 1]! += z ** power;
    }
    // Standard errors of the raw moments: sqrt(1, 2, 15, 96) / sqrt(n); four of them allowed.
    const expected = [0, 1, 0, 3];
    const variance = [1, 2, 15, 96];
    sums.forEach((sum, i) => {
      expect(Math.abs(sum / n - expected[i]!)).toBeLessThan(4 * Math.sqrt(variance[i]! / n));
    });
  });

  it('draws whole numbers below the limit, each about equally often', () => {
    const random = createRandom(9);
    const counts = new Array<number>(7).fill(0);
    for (let i = 0; i < 70_000; i++) counts[random.integer(7)]! += 1;
    const chiSquared = counts.reduce((sum, count) => sum + (count - 10_000) ** 2 / 10_000, 0);
    expect(chiSquared).toBeLessThan(22.458); // 99.9 % point, 6 degrees of freedom (printed tables)
  });

  it('forks by seed and key only, however many numbers were drawn before', () => {
    fc.assert(
      fc.property(fc.integer(), fc.oneof(fc.integer(), fc.string()), fc.nat(20), (seed, key, count) => {
        const used = createRandom(seed);
        draws(used, count);
        expect(draws(used.fork(key), 5)).toEqual(draws(createRandom(seed).fork(key), 5));
      }),
    );
  });

  it('keeps forks apart from each other, from their parent and between a number and its text', () => {
    const parent = createRandom(3);
    const first = [
      parent.uniform(),
      ...[0, 1, '0', '1', '', 'a', 'b', 'ab', 'ba'].map((k) => parent.fork(k).uniform()),
    ];
    expect(new Set(first).size).toBe(first.length);
    expect(parent.fork('a').fork('b').uniform()).not.toBe(parent.fork('b').fork('a').uniform());
  });

  it('names the argument it refuses', () => {
    expect(() => createRandom(Number.NaN)).toThrow(/seed/);
    expect(() => createRandom(1).integer(0)).toThrow(/maxExclusive/);
    expect(() => createRandom(1).pick([])).toThrow(/items/);
    expect(() => createRandom(1).fork(Number.NaN)).toThrow(/key/);
  });
});
