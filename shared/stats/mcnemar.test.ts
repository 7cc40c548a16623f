import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { majorityByCluster, mcnemar } from './mcnemar.ts';

describe('mcnemar', () => {
  it('turns over when A and B are swapped', () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 300 }), fc.integer({ min: 1, max: 300 }), (a, b) => {
        const plain = mcnemar(a, b);
        const swapped = mcnemar(b, a);
        expect([swapped.p, swapped.midP]).toEqual([plain.p, plain.midP]);
        expect(swapped.oddsRatio! * plain.oddsRatio!).toBeCloseTo(1, 12);
        expect(swapped.interval![0] * plain.interval![1]!).toBeCloseTo(1, 8);
        expect(plain.midP).toBeLessThan(plain.p);
        expect(plain.interval![0] < plain.oddsRatio! && plain.oddsRatio! < plain.interval![1]!).toBe(true);
      }),
    );
  });

  it('has wider intervals at a higher level, and a p that falls as the counts part', () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 200 }), fc.integer({ min: 1, max: 200 }), (a, b) => {
        const narrow = mcnemar(a, b, { level: 0.8 });
        const wide = mcnemar(a, b, { level: 0.99 });
        expect(wide.interval![0]).toBeLessThan(narrow.interval![0]);
        expect(wide.interval![1]!).toBeGreaterThan(narrow.interval![1]!);
        // One count moved from the smaller to the larger side of the same total.
        const [more, fewer] = [Math.max(a, b), Math.min(a, b)];
        expect(mcnemar(more + 1, fewer - 1).p).toBeLessThan(narrow.p);
      }),
    );
  });

  it('has no upper bound when nothing was heard on B only', () => {
    expect(mcnemar(6, 0)).toMatchObject({ oddsRatio: null, share: 1 });
    const [lo, hi] = mcnemar(6, 0).interval!;
    expect(hi).toBeNull();
    // Lower end of the share is (alpha / 2)^(1 / n).
    expect(lo).toBeCloseTo(0.025 ** (1 / 6) / (1 - 0.025 ** (1 / 6)), 10);
    expect(mcnemar(0, 6)).toMatchObject({ oddsRatio: 0 });
  });

  it('says nothing when nothing was heard on one side only', () => {
    expect(mcnemar(0, 0)).toMatchObject({ p: 1, midP: 1, oddsRatio: null, interval: null, chiSquared: null });
  });

  it('names the argument it refuses', () => {
    expect(() => mcnemar(1.5, 2)).toThrow(/^onlyA /);
    expect(() => mcnemar(1, -2)).toThrow(/^onlyB /);
    expect(() => mcnemar(1, 2, { level: 1 })).toThrow(/^level /);
  });
});

describe('majorityByCluster', () => {
  it('counts each cluster once, by its majority', () => {
    const sides = [1, 1, -1, -1, -1, 1, -1, 1, 0];
    const clusters = [0, 0, 0, 1, 1, 2, 2, 7, 8];
    expect(majorityByCluster(sides, clusters)).toEqual({ onlyA: 2, onlyB: 1, tied: 2 });
  });

  it('names the argument it refuses', () => {
    expect(() => majorityByCluster([1], [])).toThrow(/^sides and clusters /);
    expect(() => majorityByCluster([Number.NaN], [0])).toThrow(/^sides /);
    expect(() => majorityByCluster([1], [0.5])).toThrow(/^clusters /);
  });
});
