import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { noncentralTCdf, noncentralTUpper } from './noncentral-t.ts';
import { normalCdf, normalUpper } from './normal.ts';
import { tCdf, tUpper } from './student.ts';

const dfs = fc.double({ min: 1, max: 3000, noNaN: true });
const relative = (actual: number, expected: number) => Math.abs(actual / expected - 1);

describe('noncentral t distribution', () => {
  it("is Student's without noncentrality, far tails included", () => {
    fc.assert(
      fc.property(fc.double({ min: -60, max: 60, noNaN: true }), dfs, (t, df) => {
        fc.pre(tUpper(Math.abs(t), df) > 1e-280);
        expect(relative(noncentralTUpper(t, df, 0), tUpper(t, df))).toBeLessThan(1e-11);
        expect(relative(noncentralTCdf(t, df, 0), tCdf(t, df))).toBeLessThan(1e-11);
      }),
    );
  });

  it('is the normal distribution at zero: P(T > 0) = P(Z > -delta)', () => {
    fc.assert(
      fc.property(fc.double({ min: -20, max: 20, noNaN: true }), dfs, (delta, df) => {
        expect(relative(noncentralTUpper(0, df, delta), normalUpper(-delta))).toBeLessThan(1e-12);
        expect(relative(noncentralTCdf(0, df, delta), normalCdf(-delta))).toBeLessThan(1e-12);
      }),
    );
  });

  it('has tails that add up to one and turn with the sign', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -40, max: 40, noNaN: true }),
        fc.double({ min: -30, max: 30, noNaN: true }),
        dfs,
        (t, delta, df) => {
          expect(noncentralTUpper(t, df, delta) + noncentralTCdf(t, df, delta)).toBeCloseTo(1, 11);
          expect(noncentralTCdf(-t, df, -delta)).toBeCloseTo(noncentralTUpper(t, df, delta), 13);
        },
      ),
    );
  });

  it('has a tail that grows with delta and shrinks with t', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -5, max: 5, noNaN: true }),
        fc.double({ min: -3, max: 3, noNaN: true }),
        fc.double({ min: 0.01, max: 2, noNaN: true }),
        dfs,
        (t, delta, more, df) => {
          const here = noncentralTUpper(t, df, delta);
          expect(noncentralTUpper(t, df, delta + more)).toBeGreaterThan(here);
          expect(noncentralTUpper(t + more, df, delta)).toBeLessThan(here);
        },
      ),
    );
  });

  it('names the argument it refuses', () => {
    expect(() => noncentralTUpper(Number.NaN, 3, 0)).toThrow(/^t /);
    expect(() => noncentralTCdf(1, 0, 0)).toThrow(/^df /);
    expect(() => noncentralTCdf(1, 3, Infinity)).toThrow(/^delta /);
  });
});
