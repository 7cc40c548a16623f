import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { fCdf, fQuantile, fUpper, fUpperQuantile } from './fisher.ts';
import { tTwoSided } from './student.ts';

describe("Fisher's F distribution", () => {
  it('is the square of t when the first degrees of freedom are 1', () => {
    for (const t of [0.1, 1, 2.2, 15]) {
      for (const df of [1, 4, 30]) expect(fUpper(t * t, 1, df) / tTwoSided(t, df)).toBeCloseTo(1, 12);
    }
  });

  it('has the closed form (1 + 2 f / d)^(-d / 2) when the first degrees of freedom are 2', () => {
    for (const f of [0.01, 0.8, 5, 200])
      expect(fUpper(f, 2, 7) / (1 + (2 * f) / 7) ** -3.5).toBeCloseTo(1, 12);
  });

  it('swaps its tails when the ratio is turned over, and finds its quantile back', () => {
    const df = fc.double({ min: 0.6, max: 300, noNaN: true });
    fc.assert(
      fc.property(df, df, fc.double({ min: 1e-9, max: 0.5, noNaN: true }), (df1, df2, q) => {
        const f = fUpperQuantile(q, df1, df2);
        expect(fUpper(f, df1, df2) / q).toBeCloseTo(1, 8);
        expect(fCdf(1 / f, df2, df1) / q).toBeCloseTo(1, 8);
        expect(fQuantile(q, df2, df1) * f).toBeCloseTo(1, 8);
      }),
    );
  });

  it('ends at its borders and names the argument it refuses', () => {
    expect([fCdf(-1, 2, 2), fUpper(0, 2, 2), fUpper(Infinity, 2, 2)]).toEqual([0, 1, 0]);
    expect(() => fCdf(Number.NaN, 2, 2)).toThrow(/^f /);
    expect(() => fCdf(1, 0, 2)).toThrow(/^df1 /);
    expect(() => fUpperQuantile(0.1, 2, Infinity)).toThrow(/^df2 /);
    expect(() => fQuantile(1, 2, 2)).toThrow(/^p /);
  });
});
