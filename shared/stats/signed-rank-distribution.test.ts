import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { randomSumTail, signedRankCritical } from './signed-rank-distribution.ts';

/** Every one of the 2^n sums, the slow and sure way. */
function allSums(scores: number[]): number[] {
  return scores.reduce<number[]>((sums, score) => [...sums, ...sums.map((sum) => sum + score)], [0]);
}

describe('randomSumTail', () => {
  it('counts the same sums as listing all of them, whatever the ties', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: 1, max: 25 }), { minLength: 1, maxLength: 10 }),
        fc.nat(),
        (scores, pick) => {
          const sums = allSums(scores);
          const limit = sums[pick % sums.length]!;
          const { atMost, below } = randomSumTail(scores, limit);
          expect(atMost).toBeCloseTo(sums.filter((sum) => sum <= limit).length / sums.length, 13);
          expect(below).toBeCloseTo(sums.filter((sum) => sum < limit).length / sums.length, 13);
        },
      ),
    );
  });

  it('still holds digits at a thousand scores: the chance of none at all is 2^-1000', () => {
    const scores = Array.from({ length: 1000 }, (_, i) => i + 1);
    expect(randomSumTail(scores, 0).atMost).toBe(2 ** -1000);
  });
});

describe('signedRankCritical', () => {
  it('gives the critical values that counting by hand gives', () => {
    // n = 6: three of 64 rank sets sum to 2 or less (none, {1}, {2}). n = 10: 25 of 1,024 sum to 8 or
    // less, the partitions of 0 to 8 into distinct parts (1 + 1 + 1 + 2 + 2 + 3 + 4 + 5 + 6).
    expect(signedRankCritical(6, 1 - 2 * 0.0469)).toMatchObject({ k: 3 });
    expect(signedRankCritical(6, 1 - 2 * 0.0468)).toMatchObject({ k: 2 });
    const ten = signedRankCritical(10, 0.95);
    expect(ten).toMatchObject({ k: 9, method: 'exact' });
    expect(ten.achievedLevel).toBeCloseTo(1 - (2 * 25) / 1024, 12);
  });

  it('says what the widest interval reaches when the level is out of reach', () => {
    expect(signedRankCritical(3, 0.95)).toEqual({ k: 1, achievedLevel: 0.75, method: 'exact' });
  });

  it('continues almost without a step where the normal approximation takes over', () => {
    const share = (n: number) => signedRankCritical(n, 0.95).k / ((n * (n + 1)) / 2);
    expect(signedRankCritical(200, 0.95).method).toBe('exact');
    expect(signedRankCritical(201, 0.95).method).toBe('normal');
    const trend = share(202) - share(201);
    expect(Math.abs(share(201) - share(200) - trend)).toBeLessThan(2e-4);
  });
});
