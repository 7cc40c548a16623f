import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { confidenceSequence, confidenceSequenceReach, tunedRho } from './confidence-sequence.ts';
import { createRandom } from './random.ts';

const sample = fc.array(fc.integer({ min: -300, max: 300 }), { minLength: 8, maxLength: 80 });

describe('confidenceSequence', () => {
  it('moves with a shift, stretches with a factor and turns with the sign at every time', () => {
    fc.assert(
      fc.property(
        sample,
        fc.integer({ min: -1000, max: 1000 }),
        fc.constantFrom(-2, 3),
        (d, shift, factor) => {
          const plain = confidenceSequence(d);
          const moved = confidenceSequence(d.map((value) => shift + factor * value));
          plain.line.forEach(({ interval, estimate }, i) => {
            const other = moved.line[i]!;
            expect(other.estimate).toBeCloseTo(shift + factor * estimate, 8);
            expect(other.interval === null).toBe(interval === null);
            if (!interval) return;
            const ends = interval.map((end) => shift + factor * end).sort((a, b) => a - b);
            expect(other.interval![0]).toBeCloseTo(ends[0]!, 7);
            expect(other.interval![1]).toBeCloseTo(ends[1]!, 7);
          });
        },
      ),
    );
  });

  it('says at every time what it would say if the values ended there, in whatever order they came', () => {
    fc.assert(
      fc.property(sample, fc.nat({ max: 79 }), (d, cut) => {
        const t = 1 + (cut % d.length);
        const whole = confidenceSequence(d).line[t - 1]!;
        const short = confidenceSequence(d.slice(0, t).reverse());
        expect(short.estimate).toBeCloseTo(whole.estimate, 9);
        if (whole.interval) expect(short.interval![0]).toBeCloseTo(whole.interval[0], 8);
        else expect(short.interval).toBeNull();
      }),
    );
  });

  it('holds the mean of the moment, and is wider at a higher level', () => {
    fc.assert(
      fc.property(sample, (d) => {
        const [narrow, wide] = [0.8, 0.99].map((level) => confidenceSequence(d, { level, rho: 0.2 }));
        narrow!.line.forEach(({ estimate, interval }, i) => {
          if (!interval) return;
          expect(interval[0] < estimate && estimate < interval[1]).toBe(true);
          expect(wide!.line[i]!.interval![0] < interval[0]).toBe(true);
        });
      }),
    );
  });

  it('only ever narrows as a running intersection, inside the plain interval', () => {
    fc.assert(
      fc.property(sample, (d) => {
        const plain = confidenceSequence(d).line;
        let [lo, hi] = [-Infinity, Infinity];
        let empty = false;
        confidenceSequence(d, { runningIntersection: true }).line.forEach(({ interval }, i) => {
          if (!interval) {
            empty ||= plain[i]!.interval !== null;
            return;
          }
          expect(empty).toBe(false);
          expect(interval[0]).toBe(Math.max(lo, plain[i]!.interval![0]));
          expect(interval[1]).toBe(Math.min(hi, plain[i]!.interval![1]));
          [lo, hi] = interval;
        });
      }),
    );
  });

  it('becomes empty when the mean has walked away from where it was', () => {
    const d = Array.from({ length: 4000 }, (_, i) => (i < 400 ? 0 : 10) + (i % 2 ? 0.5 : -0.5));
    const { interval, line } = confidenceSequence(d, { runningIntersection: true });
    expect(interval).toBeNull();
    expect(line[399]!.interval).not.toBeNull();
    expect(confidenceSequence(d).interval).not.toBeNull();
  });

  it('is narrowest at the time it is tuned for', () => {
    for (const alpha of [0.2, 0.05, 0.001]) {
      for (const t of [5, 50, 1234]) {
        const best = tunedRho(t, alpha);
        const width = confidenceSequenceReach(t, best, alpha);
        for (const factor of [0.5, 0.9, 0.999, 1.001, 1.1, 2]) {
          expect(confidenceSequenceReach(t, factor * best, alpha)).toBeGreaterThan(width);
        }
        expect(confidenceSequence([1, 2], { rho: best, level: 1 - alpha }).tunedFor / t).toBeCloseTo(1, 10);
      }
    }
  });

  it('finds rho also where hardly any certainty, or nearly all, is asked', () => {
    for (const alpha of [1e-300, 1e-12, 0.5, 0.999, 1 - 1e-9]) {
      // With w = -(1 + x) the defining equation is w e^w = -alpha^2 / e.
      const x = tunedRho(1, alpha) ** 2;
      expect((x - Math.log1p(x)) / (-2 * Math.log(alpha))).toBeCloseTo(1, 7);
    }
  });

  it('draws nothing from fewer than eight values, or from equal ones', () => {
    const { line, interval, excludesZeroAt } = confidenceSequence([1, 2, 3, 1, 2, 3, 1]);
    expect(line.map((point) => point.interval)).toEqual(new Array(7).fill(null));
    expect([interval, excludesZeroAt]).toEqual([null, null]);
    expect(confidenceSequence([1, 2, 3], { from: 2 }).line.map((point) => point.interval === null)).toEqual([
      true,
      false,
      false,
    ]);
    expect(confidenceSequence(new Array(30).fill(1.7)).interval).toBeNull();
    expect(confidenceSequence([2.5]).line).toEqual([{ t: 1, estimate: 2.5, interval: null }]);
  });

  it('names the first time at which zero was outside, also if it came back in', () => {
    const d = [
      ...Array.from({ length: 60 }, (_, i) => 3 + (i % 2)),
      ...Array.from({ length: 400 }, (_, i) => (i % 2) - 6),
    ];
    const { excludesZeroAt, line } = confidenceSequence(d);
    expect(line[excludesZeroAt! - 1]!.interval![0]).toBeGreaterThan(0);
    expect(line.slice(0, excludesZeroAt! - 1).every(({ interval }) => !interval || interval[0] <= 0)).toBe(
      true,
    );
  });

  it('keeps its promise to those who look after every value, where the fixed interval breaks its own', () => {
    const random = createRandom(31);
    const runs = 1000;
    let [ours, early, fixed] = [0, 0, 0];
    for (let run = 0; run < runs; run++) {
      const values = Float64Array.from({ length: 300 }, () => random.normal());
      const { line, excludesZeroAt } = confidenceSequence(values);
      if (excludesZeroAt !== null) ours += 1;
      if (confidenceSequence(values, { from: 2, tunedFor: 50 }).excludesZeroAt !== null) early += 1;
      // The interval made for one look: 1.96 standard errors.
      const reach = confidenceSequence(values, { from: 2 });
      const looks = line.some(({ t, estimate }, i) => {
        const point = reach.line[i]!.interval;
        if (t < 8 || !point) return false;
        const sd = (point[1] - estimate) / confidenceSequenceReach(t, reach.rho, 0.05);
        return Math.abs(estimate) > (1.96 * sd) / Math.sqrt(t);
      });
      if (looks) fixed += 1;
    }
    // Three standard errors of a share of 0.05 in 1,000 runs are 0.021.
    expect(ours / runs).toBeLessThan(0.05 + 0.021);
    expect(early / runs).toBeGreaterThan(0.12);
    expect(fixed / runs).toBeGreaterThan(0.25);
  });

  it('names the argument it refuses', () => {
    expect(() => confidenceSequence([])).toThrow(/^values /);
    expect(() => confidenceSequence([1, Number.NaN])).toThrow(/^values /);
    expect(() => confidenceSequence([1], { level: 1 })).toThrow(/^level /);
    expect(() => confidenceSequence([1], { rho: 0 })).toThrow(/^rho /);
    expect(() => confidenceSequence([1], { tunedFor: -1 })).toThrow(/^tunedFor /);
    expect(() => confidenceSequence([1], { rho: 1, tunedFor: 5 })).toThrow(/^rho and tunedFor /);
    expect(() => confidenceSequence([1], { from: 1 })).toThrow(/^from /);
    expect(() => confidenceSequence([1], { from: 2.5 })).toThrow(/^from /);
    expect(() => tunedRho(0, 0.05)).toThrow(/^t /);
    expect(() => tunedRho(5, 1)).toThrow(/^alpha /);
    expect(() => confidenceSequenceReach(0, 1, 0.05)).toThrow(/^t /);
  });
});
