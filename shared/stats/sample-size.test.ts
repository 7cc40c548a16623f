import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { pairedT } from './paired-t.ts';
import { createRandom } from './random.ts';
import { sampleSize, type SampleSizeQuestion } from './sample-size.ts';

const sds = fc.double({ min: 0.1, max: 20, noNaN: true });
const powers = fc.double({ min: 0.1, max: 0.99, noNaN: true });
const levels = fc.constantFrom(0.8, 0.95, 0.99);
const ratios = fc.double({ min: 0.02, max: 2, noNaN: true });

describe('sampleSize', () => {
  it('answers the three questions of power as inverses of each other', () => {
    fc.assert(
      fc.property(sds, ratios, powers, levels, fc.boolean(), (sd, ratio, power, level, bothTails) => {
        fc.pre(power > 1 - level);
        const base = { sd, level, bothTails };
        const { n } = sampleSize({ ...base, difference: ratio * sd, power });
        if (n === 2) return;
        expect(sampleSize({ ...base, n, difference: ratio * sd }).power).toBeCloseTo(power, 9);
        expect(sampleSize({ ...base, n, power }).difference! / (ratio * sd)).toBeCloseTo(1, 8);
      }),
      { numRuns: 60 },
    );
  });

  it('reaches the wanted half-width with the values it asks for, and not with one less', () => {
    fc.assert(
      fc.property(sds, ratios, levels, (sd, ratio, level) => {
        const wanted = ratio * sd;
        const { n, whole, halfWidth } = sampleSize({ sd, level, halfWidth: wanted });
        if (n > 2) expect(halfWidth / wanted).toBeCloseTo(1, 9);
        expect(sampleSize({ sd, level, n: whole }).halfWidth).toBeLessThanOrEqual(wanted * (1 + 1e-9));
        if (whole > 2) expect(sampleSize({ sd, level, n: whole - 1 }).halfWidth).toBeGreaterThan(wanted);
      }),
      { numRuns: 60 },
    );
  });

  it('depends on difference and spread only through their ratio', () => {
    fc.assert(
      fc.property(sds, ratios, fc.double({ min: 0.1, max: 10, noNaN: true }), (sd, ratio, factor) => {
        const plain = sampleSize({ sd, difference: ratio * sd, power: 0.8 }).n;
        const scaled = sampleSize({ sd: factor * sd, difference: factor * ratio * sd, power: 0.8 }).n;
        expect(scaled / plain).toBeCloseTo(1, 9);
      }),
      { numRuns: 40 },
    );
  });

  it('asks for more values at more power, at a higher level and for a smaller difference', () => {
    const n = (change: Partial<{ sd: number; level: number; difference: number; power: number }>) =>
      sampleSize({ sd: 3, difference: 1, power: 0.8, ...change }).n;
    expect(n({ power: 0.9 })).toBeGreaterThan(n({}));
    expect(n({ level: 0.99 })).toBeGreaterThan(n({}));
    expect(n({ difference: 0.9 })).toBeGreaterThan(n({}));
    expect(n({ sd: 3.1 })).toBeGreaterThan(n({}));
  });

  it('needs two values at least, and says what two can do', () => {
    const result = sampleSize({ sd: 1, difference: 100, power: 0.8 });
    expect(result).toMatchObject({ n: 2, whole: 2 });
    expect(result.power).toBeGreaterThan(0.99);
    expect(sampleSize({ sd: 1, halfWidth: 50 }).n).toBe(2);
  });

  it('keeps a whole number whole', () => {
    const { power } = sampleSize({ sd: 4, difference: 1, n: 128 });
    expect(sampleSize({ sd: 4, difference: 1, power: power! }).whole).toBe(128);
  });

  it('foretells how often paired t tests of that size find the difference', () => {
    const random = createRandom(15);
    const { whole, sd } = sampleSize({ sd: 2.5, difference: 1, power: 0.8 });
    const { power } = sampleSize({ sd, difference: 1, n: whole });
    const runs = 2000;
    let found = 0;
    for (let run = 0; run < runs; run++) {
      const { interval } = pairedT(Array.from({ length: whole }, () => 1 + sd * random.normal()));
      if (interval![0] > 0) found += 1;
    }
    // Four standard errors of a share of 0.8 in 2,000 runs are 0.036.
    expect(Math.abs(found / runs - power!)).toBeLessThan(0.036);
  });

  it('names the argument it refuses', () => {
    const ask = (question: object) => () => sampleSize({ sd: 1, ...question } as SampleSizeQuestion);
    expect(ask({ sd: 0, n: 5 })).toThrow(/^sd /);
    expect(ask({ difference: 0, power: 0.8 })).toThrow(/^difference /);
    expect(ask({ difference: 1, power: 1 })).toThrow(/^power /);
    expect(ask({ difference: 1, power: 0.025 })).toThrow(/^power must be above 0.025/);
    expect(ask({ n: 10, power: 0.04, bothTails: true })).toThrow(/^power must be above 0.05/);
    expect(ask({ n: 1, power: 0.8 })).toThrow(/^n /);
    expect(ask({ n: Number.NaN })).toThrow(/^n /);
    expect(ask({ halfWidth: -1 })).toThrow(/^halfWidth /);
    expect(ask({ n: 5, level: 0 })).toThrow(/^level /);
    expect(ask({ halfWidth: 1e-9 })).toThrow(/^halfWidth asks for more/);
    expect(ask({ difference: 1e-9, power: 0.8 })).toThrow(/^difference asks for more/);
    expect(ask({})).toThrow(/^give /);
    expect(ask({ difference: 1 })).toThrow(/^give /);
    expect(ask({ n: 5, difference: 1, power: 0.8 })).toThrow(/^give /);
  });
});
