import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { signTest } from './sign-test.ts';

describe('signTest', () => {
  it('counts a tie as half a win in the chance that A beats B', () => {
    expect(signTest([1, 2, -1, 0])).toMatchObject({ positive: 2, negative: 1, ties: 1, chance: 0.625 });
  });

  it('has the p of coins: 5 of 5 heads is 1/16 two-sided', () => {
    expect(signTest([1, 2, 3, 4, 5]).pGreater).toBeCloseTo(0.03125, 14);
    expect(signTest([1, 2, 3, 4, 5]).pLess).toBe(1);
    expect(signTest([1, 2, 3, 4, 5]).p).toBeCloseTo(0.0625, 14);
  });

  it('turns with the sign', () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: -2, max: 2 }), { minLength: 1, maxLength: 50 }), (d) => {
        const plain = signTest(d);
        const turned = signTest(d.map((value) => -value));
        expect(turned.chance).toBeCloseTo(1 - plain.chance, 12);
        expect(turned.p).toBeCloseTo(plain.p, 12);
        expect(turned.pGreater).toBeCloseTo(plain.pLess, 12);
        if (plain.interval) expect(turned.interval![0]).toBeCloseTo(1 - plain.interval[1], 10);
      }),
    );
  });

  it('does not depend on the order or the sizes, and holds the share in an interval that grows with the level', () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: -9, max: 9 }), { minLength: 1, maxLength: 50 }), (d) => {
        const plain = signTest(d, { level: 0.8 });
        expect(signTest([...d].reverse(), { level: 0.8 })).toEqual(plain);
        expect(
          signTest(
            d.map((value) => value ** 3),
            { level: 0.8 },
          ),
        ).toEqual(plain);
        if (plain.share === null) return;
        const [lo, hi] = plain.interval!;
        const wide = signTest(d, { level: 0.95 }).interval!;
        expect(lo <= plain.share && plain.share <= hi).toBe(true);
        expect(wide[0] <= lo && hi <= wide[1]).toBe(true);
      }),
    );
  });

  it('decides nothing when every difference is zero', () => {
    expect(signTest([0, 0])).toMatchObject({
      chance: 0.5,
      share: null,
      interval: null,
      p: 1,
      pGreater: 1,
      pLess: 1,
    });
  });

  it('names the argument it refuses', () => {
    expect(() => signTest([])).toThrow(/^differences /);
    expect(() => signTest([1], { level: 2 })).toThrow(/^level /);
    expect(() => signTest([1], { resolution: Number.NaN })).toThrow(/^resolution /);
  });
});
