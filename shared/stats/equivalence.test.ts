import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { equivalence } from './equivalence.ts';

describe('equivalence', () => {
  it('holds exactly when the 90 % interval lies inside the margin (Schuirmann 1987)', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -2, max: 2, noNaN: true }),
        fc.double({ min: 0.01, max: 1, noNaN: true }),
        fc.integer({ min: 1, max: 80 }),
        (estimate, se, df) => {
          const { equivalent, interval, p } = equivalence({ estimate, se, df }, { margin: 1 });
          expect(equivalent).toBe(interval![0] > -1 && interval![1] < 1);
          expect(equivalent).toBe(p! < 0.05);
        },
      ),
    );
  });

  it('turns with the sign and gets easier with the margin', () => {
    const plain = equivalence({ estimate: 0.3, se: 0.4, df: 12 });
    const turned = equivalence({ estimate: -0.3, se: 0.4, df: 12 });
    expect([turned.pAboveLower, turned.pBelowUpper]).toEqual([plain.pBelowUpper, plain.pAboveLower]);
    expect(equivalence({ estimate: 0.3, se: 0.4, df: 12 }, { margin: 2 }).p!).toBeLessThan(plain.p!);
  });

  it('is claimed of more estimates the wider the margin, the smaller the error and the larger alpha', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -1.5, max: 1.5, noNaN: true }),
        fc.double({ min: 0.05, max: 1, noNaN: true }),
        fc.integer({ min: 2, max: 60 }),
        (estimate, se, df) => {
          fc.pre(equivalence({ estimate, se, df }, { margin: 1.6 }).equivalent);
          expect(equivalence({ estimate, se, df }, { margin: 1.9 }).equivalent).toBe(true);
          expect(equivalence({ estimate, se: se / 2, df }, { margin: 1.6 }).equivalent).toBe(true);
          expect(equivalence({ estimate, se, df }, { margin: 1.6, alpha: 0.1 }).equivalent).toBe(true);
        },
      ),
    );
  });

  it('claims nothing without a standard error', () => {
    const unknown = { pAboveLower: null, pBelowUpper: null, p: null, interval: null, equivalent: false };
    expect(equivalence({ estimate: 0, se: null, df: 4 })).toMatchObject(unknown);
    expect(equivalence([0.2, 0.2, 0.2])).toMatchObject(unknown);
  });

  it('names the argument it refuses', () => {
    expect(() => equivalence([1, 2], { margin: 0 })).toThrow(/^margin /);
    expect(() => equivalence([1, 2], { alpha: 0.5 })).toThrow(/^alpha /);
    expect(() => equivalence({ estimate: Number.NaN, se: 1, df: 3 })).toThrow(/^estimate /);
    expect(() => equivalence({ estimate: 1, se: -1, df: 3 })).toThrow(/^se /);
    expect(() => equivalence({ estimate: 1, se: 1, df: 0 })).toThrow(/^df /);
  });
});
