import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { normalCdf, normalDensity, normalQuantile, normalUpper, normalUpperQuantile } from './normal.ts';

describe('normal distribution', () => {
  it('has the points printed in every table', () => {
    expect(normalUpperQuantile(0.025)).toBeCloseTo(1.959963984540054, 14);
    expect(normalQuantile(0.5)).toBe(0);
    expect(normalUpper(0)).toBe(0.5);
  });

  it('is symmetric and finds its quantile back from either tail', () => {
    fc.assert(
      fc.property(fc.double({ min: -37, max: 37, noNaN: true }), (z) => {
        expect(normalCdf(z)).toBe(normalUpper(-z));
        const back = z > 0 ? normalUpperQuantile(normalUpper(z)) : normalQuantile(normalCdf(z));
        expect(Math.abs(back - z)).toBeLessThanOrEqual(1e-13 * Math.max(1, Math.abs(z)));
      }),
    );
  });

  it('has the density as slope of its distribution function', () => {
    for (const z of [-5, -1, -0.5, 0, 0.6, 2, 6.5]) {
      const slope = (normalUpper(z - 1e-5) - normalUpper(z + 1e-5)) / 2e-5;
      expect(slope / normalDensity(z)).toBeCloseTo(1, 4);
    }
  });

  it('runs out to zero and one, and refuses what is no probability', () => {
    expect([normalUpper(Infinity), normalUpper(-Infinity)]).toEqual([0, 1]);
    expect(() => normalUpper(Number.NaN)).toThrow(/^z /);
    expect(() => normalQuantile(0)).toThrow(/^p /);
    expect(() => normalUpperQuantile(1)).toThrow(/^q /);
  });
});
