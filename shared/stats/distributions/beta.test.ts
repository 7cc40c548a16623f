import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { betaCdf, betaQuantile, betaUpper, betaUpperQuantile } from './beta.ts';

const shape = fc.double({ min: 0.3, max: 400, noNaN: true });

describe('beta distribution', () => {
  it('has the closed forms x^a and 1 - (1 - x)^b when the other shape is 1', () => {
    for (const x of [1e-6, 0.1, 0.5, 0.93]) {
      for (const s of [0.4, 1, 3, 50]) {
        expect(betaCdf(x, s, 1) / x ** s).toBeCloseTo(1, 12);
        expect(betaUpper(x, 1, s) / (1 - x) ** s).toBeCloseTo(1, 12);
      }
    }
  });

  it('has tails that sum to one, mirror each other and grow with x', () => {
    fc.assert(
      fc.property(shape, shape, fc.double({ min: 0.001, max: 0.999, noNaN: true }), (a, b, x) => {
        expect(betaCdf(x, a, b) + betaUpper(x, a, b)).toBeCloseTo(1, 13);
        const mirrored = betaUpper(1 - x, b, a);
        expect(Math.abs(betaCdf(x, a, b) - mirrored)).toBeLessThanOrEqual(1e-10 * mirrored);
        expect(betaCdf(x * 0.9, a, b)).toBeLessThanOrEqual(betaCdf(x, a, b));
      }),
    );
  });

  it('finds its quantile back from either tail', () => {
    fc.assert(
      fc.property(shape, shape, fc.double({ min: 1e-8, max: 0.5, noNaN: true }), (a, b, p) => {
        expect(betaCdf(betaQuantile(p, a, b), a, b) / p).toBeCloseTo(1, 9);
        const high = betaUpperQuantile(p, a, b);
        // Next to 1 the quantile itself holds too few digits of its distance from 1.
        if (high < 0.999) expect(betaUpper(high, a, b) / p).toBeCloseTo(1, 9);
      }),
    );
  });

  it('ends at its borders and names the argument it refuses', () => {
    expect([betaCdf(0, 2, 3), betaCdf(1, 2, 3), betaUpper(-1, 2, 3)]).toEqual([0, 1, 1]);
    expect(() => betaCdf(Number.NaN, 1, 1)).toThrow(/^x /);
    expect(() => betaCdf(0.5, 0, 1)).toThrow(/^a /);
    expect(() => betaUpper(0.5, 1, -1)).toThrow(/^b /);
    expect(() => betaQuantile(1, 1, 1)).toThrow(/^p /);
  });
});
