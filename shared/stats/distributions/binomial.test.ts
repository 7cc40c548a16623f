import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { binomialCdf, binomialPmf, binomialQuantile, binomialUpper, clopperPearson } from './binomial.ts';

describe('binomial distribution', () => {
  it('has tails that are sums of its masses', () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 60 }), fc.double({ min: 0, max: 1, noNaN: true }), (n, p) => {
        let below = 0;
        for (let k = 0; k < n; k++) {
          below += binomialPmf(k, n, p);
          expect(Math.abs(binomialCdf(k, n, p) - below)).toBeLessThan(1e-12);
          expect(binomialCdf(k, n, p) + binomialUpper(k, n, p)).toBeCloseTo(1, 13);
        }
        expect([binomialCdf(n, n, p), binomialUpper(n, n, p), binomialCdf(-1, n, p)]).toEqual([1, 0, 0]);
      }),
    );
  });

  it('has the quantile as the first count whose tail reaches the probability', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 3000 }),
        fc.double({ min: 0.001, max: 0.999, noNaN: true }),
        fc.double({ min: 0.0001, max: 0.9999, noNaN: true }),
        (n, p, probability) => {
          const k = binomialQuantile(probability, n, p);
          expect(binomialCdf(k, n, p)).toBeGreaterThanOrEqual(probability * (1 - 1e-13));
          expect(k === 0 || binomialCdf(k - 1, n, p) < probability).toBe(true);
        },
      ),
    );
  });

  it('gives exact halves: the median of an odd number of fair trials', () => {
    expect(binomialQuantile(0.5, 11, 0.5)).toBe(5);
    expect(binomialCdf(5, 11, 0.5)).toBeCloseTo(0.5, 14);
  });

  it('names the argument it refuses', () => {
    expect(() => binomialPmf(1, 1.5, 0.5)).toThrow(/^n /);
    expect(() => binomialCdf(1, 2, 1.5)).toThrow(/^p /);
    expect(() => binomialQuantile(0, 2, 0.5)).toThrow(/^probability /);
  });
});

describe('clopperPearson', () => {
  it('puts half of 1 - level beyond each end', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 500 }),
        fc.nat(),
        fc.constantFrom(0.8, 0.9, 0.95, 0.99),
        (n, pick, level) => {
          const successes = pick % (n + 1);
          const [low, high] = clopperPearson(successes, n, level);
          const half = (1 - level) / 2;
          if (successes > 0) expect(binomialUpper(successes - 1, n, low) / half).toBeCloseTo(1, 8);
          else expect(low).toBe(0);
          if (successes < n) expect(binomialCdf(successes, n, high) / half).toBeCloseTo(1, 8);
          else expect(high).toBe(1);
        },
      ),
    );
  });

  it('has the closed form 1 - (alpha / 2)^(1 / n) when nothing succeeds', () => {
    expect(clopperPearson(0, 12, 0.95)[1]).toBeCloseTo(1 - 0.025 ** (1 / 12), 13);
  });

  it('names the argument it refuses', () => {
    expect(() => clopperPearson(0, 0, 0.95)).toThrow(/^trials /);
    expect(() => clopperPearson(3, 2, 0.95)).toThrow(/^successes /);
    expect(() => clopperPearson(1, 2, 1)).toThrow(/^level /);
  });
});
