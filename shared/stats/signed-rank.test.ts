import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { signedRank } from './signed-rank.ts';

const sample = fc.array(fc.integer({ min: -6, max: 6 }), { minLength: 1, maxLength: 9 });

/** The share of all sign patterns with a rank sum at most, and at least, the one seen. */
function byListing(d: number[], pratt: boolean): { less: number; greater: number } {
  const pool = pratt ? d : d.filter((value) => value !== 0);
  const size = pool.map(Math.abs);
  const rank = size.map((s) => {
    const smaller = size.filter((other) => other < s).length;
    return smaller + (size.filter((other) => other === s).length + 1) / 2;
  });
  const used = pool.map((value, i) => ({ value, rank: rank[i]! })).filter(({ value }) => value !== 0);
  const seen = used.reduce((sum, { value, rank: r }) => sum + (value > 0 ? r : 0), 0);
  const sums = used.reduce<number[]>((all, { rank: r }) => [...all, ...all.map((sum) => sum + r)], [0]);
  return {
    less: sums.filter((sum) => sum <= seen).length / sums.length,
    greater: sums.filter((sum) => sum >= seen).length / sums.length,
  };
}

describe('signedRank', () => {
  it.each(['drop', 'pratt'] as const)('with zeros "%s" equals the listing of all sign patterns', (zeros) => {
    fc.assert(
      fc.property(sample, (d) => {
        const result = signedRank(d, { zeros });
        const listed = byListing(d, zeros === 'pratt');
        expect(result.pLess).toBeCloseTo(listed.less, 12);
        expect(result.pGreater).toBeCloseTo(listed.greater, 12);
        expect(result.p).toBeCloseTo(Math.min(1, 2 * Math.min(listed.less, listed.greater)), 12);
      }),
    );
  });

  it('does not depend on the order, and turns with the sign', () => {
    fc.assert(
      fc.property(sample, (d) => {
        const plain = signedRank(d);
        expect(signedRank([...d].reverse())).toEqual(plain);
        const turned = signedRank(d.map((value) => -value));
        expect([turned.wPlus, turned.wMinus, turned.p]).toEqual([plain.wMinus, plain.wPlus, plain.p]);
        expect([turned.pGreater, turned.pLess]).toEqual([plain.pLess, plain.pGreater]);
      }),
    );
  });

  it('gives p = 1 when every difference is zero', () => {
    expect(signedRank([0, 0, 0])).toEqual({
      n: 0,
      zeros: 3,
      wPlus: 0,
      wMinus: 0,
      p: 1,
      pGreater: 1,
      pLess: 1,
      z: null,
      method: 'exact',
    });
  });

  it('comes close to its own exact p in the normal approximation of 300 differences', () => {
    const d = Array.from({ length: 300 }, (_, i) => ((i * 37) % 101) - 46);
    const exact = signedRank(d, { method: 'exact' });
    const normal = signedRank(d, { method: 'normal' });
    expect(Math.abs(exact.p - normal.p)).toBeLessThan(0.002);
  });

  it('treats rounding noise as zeros and ties when given a resolution', () => {
    const noisy = [0.1 + 0.2 - 0.3, 1 + 1e-13, -1, 2];
    expect(signedRank(noisy, { resolution: 1e-6 })).toMatchObject({ zeros: 1, wPlus: 4.5, wMinus: 1.5 });
  });

  it('names the argument it refuses', () => {
    expect(() => signedRank([])).toThrow(/^differences /);
    const many = Array.from({ length: 1001 }, (_, i) => i + 1);
    expect(() => signedRank(many, { method: 'exact' })).toThrow(/^method exact takes at most 1000/);
    expect(() => signedRank([1], { zeros: 'keep' as 'drop' })).toThrow(/^zeros /);
  });
});
