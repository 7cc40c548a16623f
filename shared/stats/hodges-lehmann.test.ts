import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { hodgesLehmann } from './hodges-lehmann.ts';
import { createRandom } from './random.ts';

const sample = fc.array(fc.integer({ min: -400, max: 400 }), { minLength: 2, maxLength: 60 });

describe('hodgesLehmann', () => {
  it('moves with a shift, turns with the sign, does not depend on the order', () => {
    fc.assert(
      fc.property(sample, fc.integer({ min: -100, max: 100 }), (d, shift) => {
        const { estimate, interval } = hodgesLehmann(d);
        const [lo, hi] = interval!;
        const moved = hodgesLehmann(d.map((value) => value + shift));
        expect([moved.estimate, ...moved.interval!]).toEqual([estimate + shift, lo + shift, hi + shift]);
        const turned = hodgesLehmann(d.map((value) => 0 - value));
        expect([turned.estimate + 0, ...turned.interval!]).toEqual([0 - estimate, 0 - hi, 0 - lo]);
        expect(hodgesLehmann([...d].reverse())).toEqual(hodgesLehmann(d));
      }),
    );
  });

  it('holds the estimate in its interval, which grows with the level', () => {
    fc.assert(
      fc.property(sample, (d) => {
        const [narrow, middle, wide] = [0.8, 0.95, 0.99].map((level) => hodgesLehmann(d, { level }));
        expect(narrow!.interval![0] <= narrow!.estimate && narrow!.estimate <= narrow!.interval![1]).toBe(
          true,
        );
        expect(middle!.interval![0] <= narrow!.interval![0]).toBe(true);
        expect(wide!.interval![0] <= middle!.interval![0]).toBe(true);
        expect(wide!.interval![1] >= middle!.interval![1]).toBe(true);
      }),
    );
  });

  it('has the middle of the listed averages as estimate', () => {
    expect(hodgesLehmann([1, 2, 4]).estimate).toBe(2.25);
    expect(hodgesLehmann([0, 0, 0, 8]).estimate).toBe(0);
  });

  it('bounds nothing with a single value, and says what two values reach', () => {
    expect(hodgesLehmann([3])).toMatchObject({ estimate: 3, interval: null, achievedLevel: null });
    expect(hodgesLehmann([3, 5])).toMatchObject({ interval: [3, 5], achievedLevel: 0.5, level: 0.95 });
  });

  it('covers the centre of symmetric heavy-tailed samples about as often as it says', () => {
    const random = createRandom(21);
    let covered = 0;
    for (let i = 0; i < 2000; i++) {
      const d = Array.from({ length: 12 }, () => random.normal() / random.normal());
      const [lo, hi] = hodgesLehmann(d, { level: 0.9 }).interval!;
      if (lo <= 0 && 0 <= hi) covered += 1;
    }
    // Achieved level at n = 12 is 0.9077; four standard errors are 0.026.
    expect(Math.abs(covered / 2000 - 0.9077)).toBeLessThan(0.026);
  });

  it('gives the known centre of 200,000 values laid out evenly', () => {
    const d = Float64Array.from({ length: 200_000 }, (_, i) => (((i * 7919) % 200_000) - 99_999.5) / 1000);
    const { estimate, interval } = hodgesLehmann(d);
    expect(Math.abs(estimate)).toBeLessThan(1e-9);
    // Uniform on (-100, 100): the estimator's standard error is the range / sqrt(12 n).
    expect(interval![1] / ((1.959964 * 200) / Math.sqrt(12 * 200_000))).toBeCloseTo(1, 2);
    expect(interval![0]).toBeCloseTo(-interval![1], 9);
  });

  it('names the argument it refuses', () => {
    expect(() => hodgesLehmann([])).toThrow(/^differences /);
    expect(() => hodgesLehmann([1, 2], [1])).toThrow(/^a and b /);
    expect(() => hodgesLehmann([1, 2], { level: 0 })).toThrow(/^level /);
  });
});
