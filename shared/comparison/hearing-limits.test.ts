import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { hearingLimits } from './censored.ts';
import type { NightTally } from './input.ts';

const night = (levels: NightTally['levels']): NightTally => ({
  spots: [],
  doubles: 0,
  levels,
  listening: [],
});

describe('the limit of a receiver on a band', () => {
  it('is the 2nd percentile of its SNRs over all nights, interpolated as R does', () => {
    // R 4.2.2: quantile(c(rep(3, 4), 5, rep(9, 195)), 0.02) is 4.96, from two nights put together.
    const limits = hearingLimits([
      night([{ receiver: 4, band: 160, lowestDb: 3, spots: [2, 0, 1, 0, 0, 0, 100] }]),
      night([{ receiver: 4, band: 160, lowestDb: 3, spots: [2, 0, 0, 0, 0, 0, 95] }]),
    ]);
    expect([...limits.keys()]).toEqual(['4 160']);
    expect(limits.get('4 160')).toBeCloseTo(4.96, 12);
  });

  it('is not read off fewer than a hundred spots', () => {
    expect(hearingLimits([night([{ receiver: 4, band: 80, lowestDb: 3, spots: [99] }])]).size).toBe(0);
    expect(hearingLimits([night([{ receiver: 4, band: 80, lowestDb: 3, spots: [100] }])]).get('4 80')).toBe(
      3,
    );
  });

  it('lies where sorting all spots would put it', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: -20, max: 30 }),
        fc.array(fc.integer({ min: 0, max: 40 }), { minLength: 1, maxLength: 30 }),
        (lowestDb, extra) => {
          const spots = extra.map((n, k) => (k === 0 ? n + 100 : n));
          const sorted = spots.flatMap((n, k) => Array<number>(n).fill(lowestDb + k));
          const at = (sorted.length - 1) * 0.02;
          const [low, high] = [sorted[Math.floor(at)]!, sorted[Math.ceil(at)]!];
          const limit = hearingLimits([night([{ receiver: 1, band: 40, lowestDb, spots }])]).get('1 40')!;
          expect(limit).toBeCloseTo(low + (at - Math.floor(at)) * (high - low), 10);
        },
      ),
    );
  });
});
