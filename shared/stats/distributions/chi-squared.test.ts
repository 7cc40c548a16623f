import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  chiSquaredCdf,
  chiSquaredQuantile,
  chiSquaredUpper,
  chiSquaredUpperQuantile,
} from './chi-squared.ts';
import { normalUpper } from './normal.ts';

describe('chi-squared distribution', () => {
  it('has the upper tail exp(-x / 2) at two degrees of freedom', () => {
    for (const x of [1e-4, 0.7, 3, 40, 1200])
      expect(chiSquaredUpper(x, 2) / Math.exp(-x / 2)).toBeCloseTo(1, 12);
  });

  it('is the square of a normal number at one degree of freedom', () => {
    for (const z of [0.01, 0.5, 1.96, 8, 30]) {
      expect(chiSquaredUpper(z * z, 1) / (2 * normalUpper(z))).toBeCloseTo(1, 11);
    }
  });

  it('has tails that sum to one and finds its quantile back', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0.2, max: 5000, noNaN: true }),
        fc.double({ min: 1e-12, max: 0.5, noNaN: true }),
        (df, p) => {
          const low = chiSquaredQuantile(p, df);
          const high = chiSquaredUpperQuantile(p, df);
          expect(chiSquaredCdf(low, df) / p).toBeCloseTo(1, 9);
          expect(chiSquaredUpper(high, df) / p).toBeCloseTo(1, 9);
          expect(chiSquaredCdf(high, df) + chiSquaredUpper(high, df)).toBeCloseTo(1, 13);
        },
      ),
    );
  });

  it('ends at its borders and names the argument it refuses', () => {
    expect([chiSquaredCdf(0, 3), chiSquaredUpper(Infinity, 3)]).toEqual([0, 0]);
    expect(() => chiSquaredCdf(Number.NaN, 3)).toThrow(/^x /);
    expect(() => chiSquaredUpper(1, 0)).toThrow(/^df /);
    expect(() => chiSquaredQuantile(0, 3)).toThrow(/^p /);
    expect(() => chiSquaredUpperQuantile(2, 3)).toThrow(/^q /);
  });
});
