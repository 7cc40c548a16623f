import { describe, expect, it } from 'vitest';
import { comparisonAnswer } from '../contracts/comparison.ts';
import { cell, fixtureAnswer } from './answer.fixture.ts';
import { differenceScale, placeOnScale, scaleTicks } from './difference-scale.ts';

const bins = (from: number, to: number, units: number) =>
  Array.from({ length: to - from }, (_, index) => ({ fromDb: from + index, units }));

describe('the dB axis of a comparison', () => {
  it('is chosen from answers that the contract accepts', () => {
    expect(comparisonAnswer.safeParse(fixtureAnswer()).error?.issues ?? []).toEqual([]);
  });

  it('holds 95 % of the units and leaves a few wild ones outside', () => {
    const quiet = { sectors: [], bandHours: { basis: 'utc' as const, cells: [] }, nights: [] };
    const histogram = { binWidthDb: 1, bins: [...bins(-4, 4, 100), { fromDb: 40, units: 3 }] };
    expect(differenceScale(fixtureAnswer({ ...quiet, histogram })).limitDb).toBe(4);
    const wide = { binWidthDb: 1, bins: [...bins(-4, 4, 100), { fromDb: 40, units: 80 }] };
    expect(differenceScale(fixtureAnswer({ ...quiet, histogram: wide })).limitDb).toBeGreaterThanOrEqual(41);
  });

  it('always holds the whole interval of the estimate, the margin and every cell that speaks', () => {
    const histogram = { binWidthDb: 1, bins: bins(-1, 1, 10) };
    const estimate = { ...fixtureAnswer().estimate!, interval95Db: [-9.5, 3] as [number, number] };
    expect(differenceScale(fixtureAnswer({ histogram, estimate })).limitDb).toBeGreaterThanOrEqual(9.5);
    expect(differenceScale(fixtureAnswer({ histogram, marginDb: 12 })).limitDb).toBeGreaterThan(12);
    const nights = [cell({ night: '2026-11-01', estimateDb: -17, clusters: 9 })];
    expect(differenceScale(fixtureAnswer({ histogram, nights })).limitDb).toBeGreaterThanOrEqual(17);
    const silent = [cell({ night: '2026-11-01', estimateDb: -17, clusters: 2 })];
    expect(differenceScale(fixtureAnswer({ histogram, nights: silent })).limitDb).toBeLessThan(17);
  });

  it('holds the censored estimate, and lets the intervals beside the estimate widen it by half at most', () => {
    const quiet = { sectors: [], bandHours: { basis: 'utc' as const, cells: [] }, nights: [] };
    const given = { ...quiet, histogram: { binWidthDb: 1, bins: bins(-4, 4, 100) }, peekProof: null };
    const censored = (estimateDb: number, halfWidthDb: number) => ({
      ...fixtureAnswer().censored!,
      estimateDb,
      intervalDb: [estimateDb - halfWidthDb, estimateDb + halfWidthDb] as [number, number],
    });
    const limit = (more: Partial<Parameters<typeof fixtureAnswer>[0]>) =>
      differenceScale(fixtureAnswer({ ...given, ...more })).limitDb;
    expect(limit({ censored: null })).toBe(4);
    expect(limit({ censored: censored(9, 1) })).toBeGreaterThanOrEqual(10);
    expect(limit({ censored: censored(3, 2) })).toBeGreaterThanOrEqual(5);
    expect(limit({ censored: censored(3, 40) })).toBe(6);
  });

  it('does not care how wild the peek-proof interval of an early night was', () => {
    const { peekProof, ...rest } = fixtureAnswer();
    const wild = { ...peekProof!.points[2]!, intervalDb: [-400, 400] as [number, number] };
    const points = [wild, ...peekProof!.points.slice(3)];
    expect(differenceScale({ ...rest, peekProof: { ...peekProof!, points } })).toEqual(
      differenceScale({ ...rest, peekProof }),
    );
  });

  it('has ticks in equal steps, the same on both sides of zero', () => {
    const ticks = scaleTicks({ limitDb: 12, stepDb: 3, fullColourDb: 6 });
    expect(ticks).toEqual([-12, -9, -6, -3, 0, 3, 6, 9, 12]);
  });

  it('puts zero in the middle, A to the right, and stops at the ends', () => {
    expect(placeOnScale(0, 6, 300)).toBe(150);
    expect(placeOnScale(3, 6, 300)).toBe(225);
    expect(placeOnScale(-99, 6, 300)).toBe(0);
    expect(placeOnScale(99, 6, 300)).toBe(300);
  });

  it('is 6 dB either way when nothing is known', () => {
    const counts = { ...fixtureAnswer().counts, units: 0 };
    expect(differenceScale(fixtureAnswer({ counts, estimate: null })).limitDb).toBe(6);
  });
});
