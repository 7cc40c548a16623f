import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { createRandom } from './random.ts';
import { countWalshAtMost, nextWalsh, selectWalsh, walshMatrix } from './walsh-selection.ts';

function listed(values: number[]): number[] {
  return values.flatMap((x, i) => values.slice(i).map((y) => x / 2 + y / 2 + 0)).sort((a, b) => a - b);
}

describe('selection among Walsh averages', () => {
  it('finds every rank as listing and sorting does, with and without ties', () => {
    const values = fc.oneof(
      fc.array(fc.integer({ min: -3, max: 3 }), { minLength: 1, maxLength: 12 }),
      fc.array(fc.double({ min: -100, max: 100, noNaN: true }), { minLength: 1, maxLength: 12 }),
    );
    fc.assert(
      fc.property(values, (x) => {
        const matrix = walshMatrix(x);
        const all = listed(x);
        expect(all.map((_, i) => selectWalsh(matrix, i + 1))).toEqual(all);
      }),
    );
  });

  // Large enough that rounds of random pivots come before the listing of the rest.
  it.each(['even', 'tied', 'heavy tails', 'two heaps', 'all equal'])(
    'finds ranks among 45,150 averages: %s',
    (kind) => {
      const random = createRandom(11);
      const x = Array.from({ length: 300 }, (_, i) => {
        const z = random.normal();
        if (kind === 'tied') return Math.round(3 * z);
        if (kind === 'heavy tails') return z / random.normal();
        if (kind === 'two heaps') return i % 3 === 0 ? 1e7 + z : z;
        return kind === 'all equal' ? 2.5 : random.uniform();
      });
      const matrix = walshMatrix(x);
      const all = listed(x);
      for (const rank of [1, 2, 600, 5000, 15_100, 22_575, 22_576, 30_200, 43_000, 45_149, 45_150]) {
        expect(selectWalsh(matrix, rank)).toBe(all[rank - 1]);
      }
    },
  );

  it('counts the averages up to a value and finds the next above it', () => {
    const matrix = walshMatrix([1, 2, 4]);
    // 1, 1.5, 2, 2.5, 3, 4
    expect([0, 1, 1.7, 4].map((v) => countWalshAtMost(matrix, v))).toEqual([0, 1, 2, 6]);
    expect([0, 1, 2.5, 4].map((v) => nextWalsh(matrix, v))).toEqual([1, 1.5, 3, null]);
  });

  it('does not overflow on the largest numbers', () => {
    const matrix = walshMatrix([1.7e308, 1.7e308]);
    expect(selectWalsh(matrix, 2)).toBe(1.7e308);
  });

  it('refuses a rank outside the matrix', () => {
    expect(() => selectWalsh(walshMatrix([1, 2]), 4)).toThrow(
      'rank must be a whole number from 1 to 3, got 4',
    );
    expect(() => selectWalsh(walshMatrix([1, 2]), 0)).toThrow(/^rank /);
  });
});
