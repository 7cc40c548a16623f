import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { tCdf, tQuantile, tTwoSided, tUpper, tUpperQuantile } from './student.ts';

describe("Student's t distribution", () => {
  it('has the closed forms at one and two degrees of freedom', () => {
    for (const t of [0.001, 0.3, 1, 2.5, 40, 1e6]) {
      expect(tUpper(t, 1) / (Math.atan(1 / t) / Math.PI)).toBeCloseTo(1, 13);
      const root = Math.sqrt(2 + t * t);
      expect(tUpper(t, 2) / (1 / (root * (root + t)))).toBeCloseTo(1, 9);
      expect(tUpperQuantile(Math.atan(1 / t) / Math.PI, 1) / t).toBeCloseTo(1, 12);
    }
  });

  it('is symmetric, has two equal tails and finds its quantile back', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0.001, max: 50, noNaN: true }),
        fc.double({ min: 0.5, max: 2000, noNaN: true }),
        (t, df) => {
          expect(tCdf(-t, df)).toBe(tUpper(t, df));
          expect(tTwoSided(-t, df)).toBe(tTwoSided(t, df));
          const q = tUpper(t, df);
          // Next to the smallest number of all, halving and doubling lose a bit.
          if (q < 1e-280) return;
          expect(tTwoSided(t, df)).toBe(2 * q);
          // Close to the centre the tail itself holds only so many digits of t.
          expect(Math.abs(tUpperQuantile(q, df) - t)).toBeLessThanOrEqual(1e-11 * t + 1e-14);
          expect(tQuantile(q, df)).toBe(-tUpperQuantile(q, df));
        },
      ),
    );
  });

  it('keeps far tails: t of 1e200 is beyond all numbers at 30 degrees, not NaN', () => {
    expect(tUpper(1e200, 30)).toBe(0);
    expect(tUpper(-1e200, 30)).toBe(1);
    expect(tUpperQuantile(0.5, 3)).toBe(0);
  });

  it('names the argument it refuses', () => {
    expect(() => tUpper(Number.NaN, 3)).toThrow(/^t /);
    expect(() => tUpper(1, 0)).toThrow(/^df /);
    expect(() => tUpperQuantile(0, 3)).toThrow(/^q /);
    expect(() => tQuantile(1.2, 3)).toThrow(/^p /);
  });
});
