import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { tInterval, tResult } from './intervals.ts';

describe('tInterval', () => {
  it('gets wider with the level and holds the estimate in its middle', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -50, max: 50, noNaN: true }),
        fc.double({ min: 0.01, max: 20, noNaN: true }),
        fc.integer({ min: 1, max: 500 }),
        (estimate, se, df) => {
          const [lo, hi] = tInterval(estimate, se, df, 0.9);
          const [wideLo, wideHi] = tInterval(estimate, se, df, 0.95);
          expect(wideLo < lo && lo < estimate && estimate < hi && hi < wideHi).toBe(true);
          expect((lo + hi) / 2).toBeCloseTo(estimate, 8);
        },
      ),
    );
  });

  it('excludes zero exactly when p is below 1 - level', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -6, max: 6, noNaN: true }),
        fc.integer({ min: 1, max: 99 }),
        (estimate, df) => {
          const { p, interval } = tResult(estimate, 1, df, 0.95);
          expect(p < 0.05).toBe(interval[0] > 0 || interval[1] < 0);
        },
      ),
    );
  });

  it('names the argument it refuses', () => {
    expect(() => tInterval(1, 0, 5, 0.95)).toThrow(/^se /);
    expect(() => tInterval(1, 1, 0, 0.95)).toThrow(/^df /);
    expect(() => tInterval(1, 1, 5, 95)).toThrow(/^level /);
  });
});
