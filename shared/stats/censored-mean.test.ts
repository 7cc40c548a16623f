import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { censoredMean, type CensoredMeanResult } from './censored-mean.ts';
import { clusterRegression } from './cluster-regression.ts';
import { createRandom } from './random.ts';

/** A seeded sample with exact rows and rows censored on either side or both. */
function draw(seed: number) {
  const random = createRandom(seed);
  const n = 12 + random.integer(40);
  const rows = Array.from({ length: n }, () => {
    const y = 1 + 3 * random.normal();
    const gap = random.exponential();
    const kind = random.integer(6);
    if (kind === 0) return { lower: -Infinity, upper: y + gap };
    if (kind === 1) return { lower: y - gap, upper: Infinity };
    if (kind === 2) return { lower: y - gap, upper: y + gap };
    return { lower: y, upper: y };
  });
  return {
    lower: rows.map(({ lower }) => lower),
    upper: rows.map(({ upper }) => upper),
    clusters: rows.map(() => random.integer(8)),
    column: rows.map(() => random.integer(3) - 1),
  };
}

const near = (a: number | null, b: number, size: number) =>
  expect(Math.abs(a! - b)).toBeLessThanOrEqual(1e-8 * size);

const nothing: Partial<CensoredMeanResult> = {
  estimate: null,
  se: null,
  sd: null,
  p: null,
  interval: null,
  logLikelihood: null,
};

describe('censoredMean', () => {
  it('moves with a shift, stretches with a factor and turns with the sign', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 0, max: 1e6 }),
        fc.double({ min: -500, max: 500, noNaN: true }),
        fc.double({ min: 0.01, max: 100, noNaN: true }),
        (seed, shift, factor) => {
          const { lower, upper, clusters } = draw(seed);
          const plain = censoredMean({ lower, upper }, { clusters });
          const change = (value: number) => shift + factor * value;
          const moved = censoredMean({ lower: lower.map(change), upper: upper.map(change) }, { clusters });
          const size = Math.abs(shift) + factor * (Math.abs(plain.estimate!) + plain.sd!);
          near(moved.estimate, change(plain.estimate!), size);
          near(moved.se, factor * plain.se!, size);
          near(moved.sd, factor * plain.sd!, size);
          const minus = (value: number) => -value;
          const turned = censoredMean({ lower: upper.map(minus), upper: lower.map(minus) }, { clusters });
          near(turned.estimate, -plain.estimate!, 10);
          near(turned.interval![0], -plain.interval![1], 10);
          expect([turned.leftCensored, turned.rightCensored]).toEqual([
            plain.rightCensored,
            plain.leftCensored,
          ]);
        },
      ),
      { numRuns: 60 },
    );
  });

  it('does not depend on the order of rows or the names of clusters', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 1e6 }), (seed) => {
        const { lower, upper, clusters, column } = draw(seed);
        const plain = censoredMean({ lower, upper }, { clusters, columns: [column] });
        const mixed = censoredMean(
          { lower: [...lower].reverse(), upper: [...upper].reverse() },
          { clusters: clusters.map((id) => 70 - id).reverse(), columns: [[...column].reverse()] },
        );
        near(mixed.estimate, plain.estimate!, 10);
        near(mixed.se, plain.se!, 1);
        near(mixed.coefficients[0]!.se, plain.coefficients[0]!.se!, 1);
      }),
      { numRuns: 60 },
    );
  });

  it('holds the estimate in its interval, which grows with the level', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 1e6 }), fc.boolean(), (seed, byCluster) => {
        const { lower, upper, clusters } = draw(seed);
        const ends = [0.5, 0.9, 0.99].map((level) => {
          const options = byCluster ? { level, clusters } : { level };
          const { estimate, interval } = censoredMean({ lower, upper }, options);
          expect(interval![0] < estimate! && estimate! < interval![1]).toBe(true);
          return interval!;
        });
        expect(ends[0]![0] > ends[1]![0] && ends[1]![0] > ends[2]![0]).toBe(true);
        expect(ends[0]![1] < ends[1]![1] && ends[1]![1] < ends[2]![1]).toBe(true);
      }),
      { numRuns: 40 },
    );
  });

  it('is clusterRegression when nothing is censored', () => {
    const random = createRandom(5);
    const y = Array.from({ length: 90 }, () => 40000 + 3 * random.normal());
    const clusters = y.map(() => random.integer(12));
    const columns = [0, 1].map(() => y.map(() => random.integer(3) - 1));
    const plain = clusterRegression({ columns: [y.map(() => 1), ...columns] }, y, clusters);
    const result = censoredMean({ lower: y, upper: y }, { clusters, columns });
    expect(result.estimate).toBeCloseTo(plain.coefficients[0]!.estimate!, 9);
    expect(result.se).toBeCloseTo(plain.coefficients[0]!.se!, 9);
    expect(result.interval![1]).toBeCloseTo(plain.coefficients[0]!.interval![1], 8);
    expect(result.coefficients[1]!.se).toBeCloseTo(plain.coefficients[2]!.se!, 9);
    expect(result).toMatchObject({ df: 11, exact: 90, clusters: 12, reason: null });
    // The deviation by maximum likelihood divides by n, not by n - k.
    expect(result.sd).toBeCloseTo(Math.sqrt((plain.residualVariance! * 87) / 90), 9);
  });

  it('finds the mean again that selection has hidden', () => {
    const random = createRandom(11);
    const n = 20_000;
    const lower = new Float64Array(n);
    const upper = new Float64Array(n);
    let [seen, sum] = [0, 0];
    for (let i = 0; i < n; i++) {
      const y = 2 + 4 * random.normal();
      lower[i] = upper[i] = Math.min(y, 3);
      if (y > 3) upper[i] = Infinity;
      else {
        seen += 1;
        sum += y;
      }
    }
    const { estimate, sd, se } = censoredMean({ lower, upper });
    expect(Math.abs(estimate! - 2)).toBeLessThan(4 * se!);
    expect(sd).toBeCloseTo(4, 0);
    expect(sum / seen).toBeLessThan(0);
  });

  it('says why there is no estimate instead of running away', () => {
    const inf = Infinity;
    const reasonOf = (lower: number[], upper: number[], columns?: number[][]) => {
      const result = censoredMean({ lower, upper }, { columns });
      expect(result).toMatchObject(nothing);
      return result.reason;
    };
    expect(reasonOf([-inf, -inf], [3, 4])).toBe('one-sided');
    expect(reasonOf([3, 1], [inf, inf])).toBe('one-sided');
    expect(reasonOf([2, 2, 2], [2, 2, 2])).toBe('no-spread');
    expect(reasonOf([2, 1, -inf], [2, inf, 3])).toBe('no-spread');
    expect(reasonOf([4], [4])).toBe('no-spread');
    // Below -1, below -3 and above 1: the wider the normal, the less it disagrees.
    expect(reasonOf([-inf, 1, -inf], [-1, inf, -3])).toBe('unbounded-spread');
    expect(reasonOf([1, 2, 3, 4], [1, 2, 3, 4], [[1, 1, 1, 1]])).toBe('cannot-be-separated');
    expect(reasonOf([1, 2, 3, 4], [1, 2, 3, 4], [[1, 2, 3, 4]])).toBe('no-spread');
    expect(reasonOf([1, 2, 3, 4, 5, 6], [1, 2, 3, 4, inf, inf], [[0, 0, 0, 0, 1, 1]])).toBe('no-maximum');
  });

  it('leaves out a column that is tangled with another, and only that', () => {
    const { lower, upper, column } = draw(3);
    const random = createRandom(4);
    const other = column.map(() => random.normal());
    const alone = censoredMean({ lower, upper }, { columns: [column, other] });
    const doubled = column.map((value) => 2 * value);
    const result = censoredMean({ lower, upper }, { columns: [column, doubled, other] });
    expect(result.coefficients.map(({ estimate }) => estimate === null)).toEqual([true, true, false]);
    expect(result.estimate).toBeCloseTo(alone.estimate!, 8);
    expect(result.coefficients[2]!.se).toBeCloseTo(alone.coefficients[1]!.se!, 8);
  });

  it('keeps the estimate but no error with a single cluster', () => {
    const result = censoredMean({ lower: [1, 2, 5], upper: [1, 2, Infinity] }, { clusters: [0, 0, 0] });
    expect(result).toMatchObject({ se: null, interval: null, p: null, df: 0, reason: 'one-cluster' });
    expect(result.estimate).toBeCloseTo(
      censoredMean({ lower: [1, 2, 5], upper: [1, 2, Infinity] }).estimate!,
      12,
    );
    expect(result.modelSe).toBeGreaterThan(0);
  });

  it('names the argument it refuses', () => {
    const inf = Infinity;
    expect(() => censoredMean({ lower: [], upper: [] })).toThrow(/^lower /);
    expect(() => censoredMean({ lower: [1], upper: [1, 2] })).toThrow(/^lower and upper must have equal/);
    expect(() => censoredMean({ lower: [1, 3], upper: [1, 2] })).toThrow(
      /^lower must be at or below upper, entry 1/,
    );
    expect(() => censoredMean({ lower: [1, Number.NaN], upper: [1, 2] })).toThrow(/^lower .* entry 1/);
    expect(() => censoredMean({ lower: [inf], upper: [inf] })).toThrow(/^lower /);
    expect(() => censoredMean({ lower: [-inf], upper: [inf] })).toThrow(/entry 0 is free on both sides/);
    expect(() => censoredMean({ lower: [1], upper: [1] }, { level: 1 })).toThrow(/^level /);
    expect(() => censoredMean({ lower: [1], upper: [1] }, { clusters: [] })).toThrow(/^clusters /);
    expect(() => censoredMean({ lower: [1], upper: [1] }, { columns: [[]] })).toThrow(/^columns\[0\] /);
  });
});
