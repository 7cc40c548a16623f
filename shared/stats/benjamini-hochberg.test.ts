import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { benjaminiHochberg } from './benjamini-hochberg.ts';

describe('benjaminiHochberg', () => {
  it('rejects what the step-up rule rejects: all up to the last p at or below q i / m', () => {
    const list = fc.array(fc.integer({ min: 0, max: 1000 }), { minLength: 1, maxLength: 40 });
    fc.assert(
      fc.property(list, (thousandths) => {
        const p = thousandths.map((value) => value / 1000);
        const { adjusted, rejected } = benjaminiHochberg(p, { q: 0.1003 });
        const sorted = [...p].sort((a, b) => a - b);
        const last = sorted.findLastIndex((value, i) => value <= (0.1003 * (i + 1)) / p.length);
        expect(rejected).toEqual(p.map((value) => last >= 0 && value <= sorted[last]!));
        expect(adjusted.every((value, i) => value >= p[i]! * (1 - 1e-15) && value <= 1)).toBe(true);
      }),
    );
  });

  it('does not depend on the order of the cells', () => {
    fc.assert(
      fc.property(fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { maxLength: 30 }), (p) => {
        expect(benjaminiHochberg([...p].reverse()).adjusted.reverse()).toEqual(benjaminiHochberg(p).adjusted);
      }),
    );
  });

  it('gives empty lists for a map without cells', () => {
    expect(benjaminiHochberg([])).toEqual({ adjusted: [], rejected: [], rejectedCount: 0 });
  });

  it('names the argument it refuses', () => {
    expect(() => benjaminiHochberg([0.1, 1.1])).toThrow(/^p\[1\] /);
    expect(() => benjaminiHochberg([Number.NaN])).toThrow(/^p\[0\] /);
    expect(() => benjaminiHochberg([0.1], { q: 0 })).toThrow(/^q /);
  });
});
