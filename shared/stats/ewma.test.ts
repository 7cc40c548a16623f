import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { ewma } from './ewma.ts';

const values = fc.array(fc.double({ min: -50, max: 50, noNaN: true }), { minLength: 1, maxLength: 60 });
const lambdas = fc.double({ min: 0.01, max: 1, noNaN: true });

describe('ewma', () => {
  it('is the weighted sum written out: lambda (1 - lambda)^j on the value j steps ago', () => {
    fc.assert(
      fc.property(values, lambdas, fc.double({ min: -20, max: 20, noNaN: true }), (x, lambda, center) => {
        const result = ewma(x, { lambda, center, sd: 1 });
        const last = x.length - 1;
        const sum = x.reduce((total, value, i) => total + lambda * (1 - lambda) ** (last - i) * value, 0);
        expect(result.ewma[last]).toBeCloseTo(sum + (1 - lambda) ** x.length * center, 9);
      }),
    );
  });

  it('moves with a shift, turns with the sign, and does not alarm twice on one excursion', () => {
    fc.assert(
      fc.property(values, lambdas, fc.integer({ min: -300, max: 300 }), (x, lambda, shift) => {
        const plain = ewma(x, { lambda, center: 0, sd: 4 });
        const moved = ewma(
          x.map((value) => value + shift),
          { lambda, center: shift, sd: 4 },
        );
        const turned = ewma(
          x.map((value) => 0 - value),
          { lambda, center: 0, sd: 4 },
        );
        moved.ewma.forEach((value, i) => expect(value).toBeCloseTo(plain.ewma[i]! + shift, 9));
        expect(turned.ewma).toEqual(plain.ewma.map((value) => 0 - value));
        expect(turned.alarms).toEqual(
          plain.alarms.map(({ index, side }) => ({ index, side: side === 'high' ? 'low' : 'high' })),
        );
        for (let i = 1; i < plain.alarms.length; i++) {
          expect(plain.alarms[i]!.index).toBeGreaterThan(plain.alarms[i - 1]!.index);
        }
      }),
    );
  });

  it('has limits that widen from k lambda sd to the asymptotic ones', () => {
    fc.assert(
      fc.property(lambdas, fc.double({ min: 0.5, max: 4, noNaN: true }), (lambda, k) => {
        const { upper, lower, asymptotic } = ewma(new Array<number>(900).fill(0), {
          lambda,
          center: 10,
          sd: 2,
          k,
        });
        expect(upper[0]).toBeCloseTo(10 + k * lambda * 2, 10);
        expect(upper[899]).toBeCloseTo(asymptotic[1], 6);
        expect(upper.every((value, i) => i === 0 || value >= upper[i - 1]!)).toBe(true);
        expect(lower[5]! + upper[5]!).toBeCloseTo(20, 10);
      }),
    );
  });

  it('alarms early within the limits of the first times, which the asymptotic ones would miss', () => {
    const x = [2.5, 0, 0];
    expect(ewma(x, { lambda: 0.2, center: 0, sd: 1, k: 2 }).firstAlarmIndex).toBe(0);
    expect(ewma(x, { lambda: 0.2, center: 0, sd: 1, k: 2, limits: 'asymptotic' }).firstAlarmIndex).toBeNull();
  });

  it('is the value itself with a weight of one', () => {
    expect(ewma([3, -1, 4], { lambda: 1, center: 0, sd: 1 }).ewma).toEqual([3, -1, 4]);
  });

  it('names the argument it refuses', () => {
    expect(() => ewma([], { center: 0, sd: 1 })).toThrow(/^values /);
    expect(() => ewma([1], { center: 0, sd: 1, lambda: 0 })).toThrow(/^lambda /);
    expect(() => ewma([1], { center: 0, sd: 1, lambda: 1.1 })).toThrow(/^lambda /);
    expect(() => ewma([1], { center: Number.NaN, sd: 1 })).toThrow(/^center /);
    expect(() => ewma([1], { center: 0, sd: 0 })).toThrow(/^sd /);
    expect(() => ewma([1], { center: 0, sd: 1, k: -1 })).toThrow(/^k /);
    expect(() => ewma([1], { center: 0, sd: 1, limits: 'none' as 'exact' })).toThrow(/^limits /);
  });
});
