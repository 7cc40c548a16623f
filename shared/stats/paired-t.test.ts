import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { pairedT } from './paired-t.ts';

const sample = fc.array(fc.integer({ min: -200, max: 200 }), { minLength: 2, maxLength: 40 });

describe('pairedT', () => {
  it('moves with a shift and turns with the sign', () => {
    fc.assert(
      fc.property(sample, fc.integer({ min: -50, max: 50 }), (d, shift) => {
        const plain = pairedT(d);
        const moved = pairedT(d.map((value) => value + shift));
        const turned = pairedT(d.map((value) => -value));
        expect(moved.estimate).toBeCloseTo(plain.estimate + shift, 9);
        expect(turned.estimate).toBeCloseTo(-plain.estimate, 9);
        if (plain.interval === null) {
          expect([moved.interval, turned.interval]).toEqual([null, null]);
          return;
        }
        expect(moved.interval![0]).toBeCloseTo(plain.interval[0] + shift, 8);
        expect(turned.interval![1]).toBeCloseTo(-plain.interval[0], 8);
        expect(plain.interval[0] <= plain.estimate && plain.estimate <= plain.interval[1]).toBe(true);
      }),
    );
  });

  it('does not depend on the order, and is wider at a higher level', () => {
    fc.assert(
      fc.property(sample, (d) => {
        const plain = pairedT(d, { level: 0.9 });
        const back = pairedT([...d].reverse(), { level: 0.9 });
        expect(back.estimate).toBeCloseTo(plain.estimate, 10);
        expect(back.sd).toBeCloseTo(plain.sd, 10);
        if (plain.interval === null) return;
        const wide = pairedT(d, { level: 0.99 }).interval!;
        expect(wide[0] < plain.interval[0] && plain.interval[1] < wide[1]).toBe(true);
        // The interval leaves zero out exactly when p is below 1 - level.
        expect(plain.interval[0] > 0 || plain.interval[1] < 0).toBe(plain.p! < 1 - plain.level);
      }),
    );
  });

  it('says nothing about the spread of equal differences', () => {
    expect(pairedT([1.7, 1.7, 1.7])).toMatchObject({
      estimate: 1.7,
      sd: 0,
      se: null,
      t: null,
      p: null,
      interval: null,
      dz: null,
    });
  });

  it('reports the effect size as mean over standard deviation', () => {
    expect(pairedT([1, 2, 3]).dz).toBeCloseTo(2, 12);
  });

  it('names the argument it refuses', () => {
    expect(() => pairedT([1])).toThrow(/^differences /);
    expect(() => pairedT([1, 2], [1, Number.NaN])).toThrow(/^b /);
    expect(() => pairedT([1, 2], { level: 1 })).toThrow(/^level /);
  });
});
