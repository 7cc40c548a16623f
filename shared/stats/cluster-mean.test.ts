import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { clusterMean } from './cluster-mean.ts';
import { createRandom } from './random.ts';

describe('clusterMean', () => {
  it('has the variance written out by hand: C/(C-1) * sum of squared cluster sums / n^2', () => {
    // Mean 3; cluster sums of deviations -3, 3; variance 2 * 18 / 16.
    const result = clusterMean([1, 2, 3, 6], [0, 0, 1, 1]);
    expect(result).toMatchObject({ estimate: 3, df: 1, n: 4, clusters: 2, reason: null });
    expect(result.se).toBeCloseTo(Math.sqrt((2 * 18) / 16), 12);
  });

  it('keeps its digits when a large constant is added', () => {
    const y = Array.from({ length: 101 }, (_, i) => ((i * 37) % 17) / 10);
    const clusters = y.map((_, i) => i % 12);
    const plain = clusterMean(y, clusters);
    const moved = clusterMean(
      y.map((value) => value + 1e7),
      clusters,
    );
    expect(moved.estimate - 1e7).toBeCloseTo(plain.estimate, 7);
    expect(moved.se! / plain.se!).toBeCloseTo(1, 7);
  });

  it('moves with a shift, turns with the sign, and depends neither on order nor on names of clusters', () => {
    const rows = fc.array(fc.tuple(fc.integer({ min: -80, max: 80 }), fc.nat({ max: 9 })), {
      minLength: 2,
      maxLength: 60,
    });
    fc.assert(
      fc.property(rows, fc.integer({ min: -40, max: 40 }), (drawn, shift) => {
        const y = drawn.map(([value]) => value);
        const clusters = drawn.map(([, id]) => id);
        const plain = clusterMean(y, clusters);
        const moved = clusterMean(
          y.map((value) => value + shift),
          clusters,
        );
        const turned = clusterMean(
          y.map((value) => -value).reverse(),
          clusters.map((id) => 40 - 2 * id).reverse(),
        );
        expect(moved.estimate).toBeCloseTo(plain.estimate + shift, 9);
        expect(turned.estimate).toBeCloseTo(-plain.estimate, 9);
        expect(turned.reason).toBe(plain.reason);
        if (plain.interval === null) return;
        expect(moved.se! / plain.se!).toBeCloseTo(1, 8);
        expect(turned.interval![1]).toBeCloseTo(-plain.interval[0], 7);
        const wide = clusterMean(y, clusters, { level: 0.99 }).interval!;
        expect(wide[0] < plain.interval[0] && plain.interval[0] < plain.estimate).toBe(true);
        expect(plain.estimate < plain.interval[1] && plain.interval[1] < wide[1]).toBe(true);
      }),
    );
  });

  it('says why there is no standard error', () => {
    expect(clusterMean([1, 2], [0, 0])).toMatchObject({
      estimate: 1.5,
      se: null,
      interval: null,
      reason: 'one-cluster',
    });
    expect(clusterMean([2], [0])).toMatchObject({ estimate: 2, p: null, reason: 'no-degrees-of-freedom' });
    expect(clusterMean([0.7, 0.7, 0.7], [0, 1, 2])).toMatchObject({ se: null, t: null, reason: 'no-spread' });
  });

  it('weights rows, whatever the scale of the weights', () => {
    fc.assert(
      fc.property(fc.double({ min: 0.01, max: 100, noNaN: true }), (scale) => {
        const y = [1, 4, 2, 8, 5];
        const weights = [1, 2, 1, 0.5, 3];
        const plain = clusterMean(y, [0, 1, 2, 2, 3], { weights });
        const scaled = clusterMean(y, [0, 1, 2, 2, 3], { weights: weights.map((weight) => weight * scale) });
        expect(plain.estimate).toBeCloseTo((1 + 8 + 2 + 4 + 15) / 7.5, 12);
        expect(scaled.se).toBeCloseTo(plain.se!, 10);
      }),
    );
  });

  it('covers the truth as often as it says with stations that repeat themselves, where units as independent do not', () => {
    const random = createRandom(77);
    let ours = 0;
    let naive = 0;
    const runs = 400;
    for (let run = 0; run < runs; run++) {
      const y: number[] = [];
      const clusters: number[] = [];
      for (let cluster = 0; cluster < 30; cluster++) {
        const station = 2 * random.normal();
        for (let unit = 0; unit < 8; unit++) {
          y.push(station + random.normal());
          clusters.push(cluster);
        }
      }
      const covers = (ids: number[]) => {
        const [lo, hi] = clusterMean(y, ids).interval!;
        return lo <= 0 && 0 <= hi;
      };
      if (covers(clusters)) ours += 1;
      if (covers(y.map((_, i) => i))) naive += 1;
    }
    // Four standard errors of a share of 0.95 in 400 runs are 0.044.
    expect(Math.abs(ours / runs - 0.95)).toBeLessThan(0.044);
    expect(naive / runs).toBeLessThan(0.7);
  });
});
