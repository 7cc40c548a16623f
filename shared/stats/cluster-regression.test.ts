import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { clusterIds } from './cluster-ids.ts';
import { clusterRegression, type ClusterRegressionResult, linearCombination } from './cluster-regression.ts';
import { createRandom } from './random.ts';

interface Drawn {
  cells: number[];
  cellCount: number;
  columns: number[][];
  y: number[];
  clusters: number[];
  weights: number[] | undefined;
  secondClusters: number[] | undefined;
}

/** A small seeded data set, often with empty cells, tangled columns and thin clusters. */
function draw(seed: number): Drawn {
  const random = createRandom(seed);
  const n = 3 + random.integer(60);
  const cellCount = 1 + random.integer(5);
  const list = <T>(make: (i: number) => T) => Array.from({ length: n }, (_, i) => make(i));
  const cells = list(() => random.integer(cellCount));
  const columns = Array.from({ length: random.integer(4) }, () => list(() => random.integer(3) - 1));
  if (random.uniform() < 0.3) columns.push(list((i) => (cells[i] === 0 ? 1 : 0)));
  return {
    cells,
    cellCount,
    columns,
    y: list(() => Math.round(40 * random.normal()) / 4),
    clusters: clusterIds(list(() => random.integer(1 + random.integer(n)))).ids as unknown as number[],
    weights: random.uniform() < 0.4 ? list(() => 0.2 + random.uniform()) : undefined,
    secondClusters: random.uniform() < 0.3 ? list(() => random.integer(5)) : undefined,
  };
}

const denseColumns = ({ cells, cellCount, columns }: Drawn) => [
  ...Array.from({ length: cellCount }, (_, c) => cells.map((cell) => (cell === c ? 1 : 0))),
  ...columns,
];
const optionsOf = ({ weights, secondClusters }: Drawn) => ({ weights, secondClusters });

/** Everything the two fits disagree about, as text: one assertion per fit keeps the properties quick. */
function differences(a: ClusterRegressionResult, b: ClusterRegressionResult): string[] {
  const found: string[] = [];
  const facts = (fit: ClusterRegressionResult) => [fit.rank, fit.clusters, fit.df, fit.confounded];
  if (JSON.stringify(facts(a)) !== JSON.stringify(facts(b))) found.push(`${facts(a)} against ${facts(b)}`);
  a.coefficients.forEach((one, j) => {
    const other = b.coefficients[j]!;
    for (const key of Object.keys(one) as (keyof typeof one)[]) {
      const [x, y] = [one[key], other[key]];
      const near =
        typeof x === 'number' && typeof y === 'number'
          ? Math.abs(x - y) <= 1e-8 * Math.max(1, Math.abs(x))
          : Array.isArray(x) && Array.isArray(y)
            ? x.length === y.length &&
              x.every((value, i) => Math.abs(value - y[i]!) <= 1e-7 * Math.max(1, Math.abs(value)))
            : x === y;
      if (!near) found.push(`coefficient ${j} ${key}: ${x} against ${y}`);
    }
  });
  return found;
}

describe('clusterRegression', () => {
  it('gives the same from cells as from the indicators laid out', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 1e9 }), (seed) => {
        const data = draw(seed);
        const { cells, cellCount, columns, y, clusters } = data;
        const structured = clusterRegression({ cells, cellCount, columns }, y, clusters, optionsOf(data));
        const dense = clusterRegression({ columns: denseColumns(data) }, y, clusters, optionsOf(data));
        expect(differences(structured, dense)).toEqual([]);
      }),
      { numRuns: 300, examples: [[108605782]] },
    );
  });

  it('does not depend on the order of the rows, nor on the names of the clusters', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 1e9 }), (seed) => {
        const data = draw(seed);
        const { cells, cellCount, columns, y, clusters } = data;
        const turn = <T>(list: ArrayLike<T>) => Array.from(list).reverse();
        const found = differences(
          clusterRegression({ cells, cellCount, columns }, y, clusters, optionsOf(data)),
          clusterRegression(
            { cells: turn(cells), cellCount, columns: columns.map(turn) },
            turn(y),
            turn(clusters).map((id) => 3 * id + 1),
            {
              weights: data.weights && turn(data.weights),
              secondClusters: data.secondClusters && turn(data.secondClusters),
            },
          ),
        );
        expect(found).toEqual([]);
      }),
    );
  });

  it('moves cells with a shift of y and leaves everything else; turns with the sign', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 1e9 }), fc.integer({ min: -20, max: 20 }), (seed, shift) => {
        const { cells, cellCount, columns, y, clusters } = draw(seed);
        const design = { cells, cellCount, columns };
        const plain = clusterRegression(design, y, clusters).coefficients;
        const moved = clusterRegression(
          design,
          y.map((value) => value + shift),
          clusters,
        ).coefficients;
        const turned = clusterRegression(
          design,
          y.map((value) => -value),
          clusters,
        ).coefficients;
        plain.forEach(({ estimate, se }, j) => {
          if (estimate === null) return;
          expect(moved[j]!.estimate).toBeCloseTo(estimate + (j < cellCount ? shift : 0), 7);
          expect(turned[j]!.estimate).toBeCloseTo(-estimate, 9);
          if (se !== null)
            expect([moved[j]!.se! / se, turned[j]!.se! / se]).toEqual([
              expect.closeTo(1, 6),
              expect.closeTo(1, 9),
            ]);
        });
      }),
    );
  });

  it('gets wider intervals with a higher level, around the estimate', () => {
    const { cells, cellCount, y, clusters } = draw(12);
    const at = (level: number) =>
      clusterRegression({ cells, cellCount }, y, clusters, { level }).coefficients;
    at(0.9).forEach(({ interval, estimate }, j) => {
      if (interval === null || estimate === null) return;
      const wide = at(0.99)[j]!.interval!;
      expect(
        wide[0] < interval[0] && interval[0] < estimate && estimate < interval[1] && interval[1] < wide[1],
      ).toBe(true);
    });
  });

  it('names the antenna and the receiver that were never swapped', () => {
    // Column 0: antenna difference; 1: receiver r1, always with it; 2: receiver r3, free.
    const antenna = [1, 1, 1, 1, 1, 1];
    const always = [1, 1, 1, 1, 1, 1];
    const free = [1, 0, 1, 0, -1, 0];
    const fit = clusterRegression(
      { columns: [antenna, always, free] },
      [3, 1, 4, 2, 0, 2],
      [0, 1, 2, 3, 4, 5],
    );
    expect(fit.confounded).toEqual([[0, 1]]);
    expect(fit.coefficients.map(({ reason }) => reason)).toEqual([
      'cannot-be-separated',
      'cannot-be-separated',
      null,
    ]);
    expect(fit.coefficients[0]).toMatchObject({ estimate: null, interval: null, confoundedWith: [1] });
    expect(fit.nullSpace).toHaveLength(1);
    expect(fit.nullSpace[0]![0]).toBeCloseTo(-fit.nullSpace[0]![1]!, 12);
    expect(fit.nullSpace[0]![2]).toBe(0);
    // Their sum is what the data do show, and the free receiver is untouched by the tangle.
    expect(linearCombination(fit, [1, 0, 0])).toBeNull();
    expect(linearCombination(fit, [1, -1, 0])).toBeNull();
    const alone = clusterRegression({ columns: [antenna, free] }, [3, 1, 4, 2, 0, 2], [0, 1, 2, 3, 4, 5]);
    expect(linearCombination(fit, [1, 1, 0])!.estimate).toBeCloseTo(alone.coefficients[0]!.estimate!, 12);
    expect(fit.coefficients[2]!.se).toBeCloseTo(alone.coefficients[1]!.se!, 12);
  });

  it('keeps two separate tangles apart', () => {
    const one = [1, 1, 0, 0, 0, 0, 0, 0];
    const two = [0, 0, 1, 1, 0, 0, 0, 0];
    const rest = [0, 0, 0, 0, 1, 1, 1, 1];
    const fit = clusterRegression(
      { columns: [one, two, rest, two, one] },
      [1, 2, 3, 4, 5, 6, 7, 9],
      [0, 1, 2, 3, 4, 5, 6, 7],
    );
    expect(fit.confounded).toEqual([
      [0, 4],
      [1, 3],
    ]);
    expect(fit.coefficients[2]!.estimate).toBeCloseTo(6.75, 12);
  });

  it('is not misled about dependence by the scale of a column', () => {
    const random = createRandom(8);
    const n = 60;
    const small = Array.from({ length: n }, () => 1e-9 * random.normal());
    const large = Array.from({ length: n }, () => 1e9 * random.normal());
    const y = Array.from({ length: n }, () => random.normal());
    const fit = clusterRegression(
      { columns: [small, large] },
      y,
      Array.from({ length: n }, (_, i) => i % 20),
    );
    expect(fit.rank).toBe(2);
    expect(fit.confounded).toEqual([]);
  });

  it('takes rows in no cell as indicators laid out would', () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 1e9 }), fc.boolean(), (seed, twoWay) => {
        const random = createRandom(seed);
        const n = 80;
        const pickOf = (count: number) => Math.min(count - 1, Math.floor(random.uniform() * count));
        const cells = Array.from({ length: n }, (_, i) => (i < 4 ? i - 1 : pickOf(4) - 1));
        const offset = Array.from({ length: n }, () => pickOf(3) - 1);
        const y = Array.from({ length: n }, () => random.normal());
        const clusters = Array.from({ length: n }, (_, i) => (i < 20 ? i : pickOf(20)));
        const options = {
          weights: Array.from({ length: n }, () => 0.5 + random.uniform()),
          ...(twoWay ? { secondClusters: Array.from({ length: n }, (_, i) => i % 7) } : {}),
        };
        const short = clusterRegression({ cells, cellCount: 3, columns: [offset] }, y, clusters, options);
        const indicators = [0, 1, 2].map((cell) => cells.map((own) => Number(own === cell)));
        const long = clusterRegression({ columns: [...indicators, offset] }, y, clusters, options);
        long.coefficients.forEach((wanted, j) => {
          const given = short.coefficients[j]!;
          expect(given.estimate).toBeCloseTo(wanted.estimate!, 9);
          expect(given.se).toBeCloseTo(wanted.se!, 9);
          expect(given.rows).toBe(wanted.rows);
          expect(given.clusters).toBe(wanted.clusters);
        });
        expect(short.df).toBe(long.df);
        expect(short.rank).toBe(4);
      }),
      { numRuns: 100 },
    );
  });

  it('says why a standard error is missing instead of giving zero or NaN', () => {
    const reasons = (fit: ClusterRegressionResult) => fit.coefficients.map(({ reason }) => reason);
    const design = { cells: [0, 0, 1, 1, 1], cellCount: 3 };
    const spread = clusterRegression(design, [1, 2, 3, 4, 6], [0, 0, 1, 2, 3]);
    expect(reasons(spread)).toEqual(['one-cluster', null, 'no-rows']);
    expect(spread.coefficients[0]).toMatchObject({
      estimate: 1.5,
      se: null,
      p: null,
      interval: null,
      estimable: true,
    });
    expect(reasons(clusterRegression(design, [1, 2, 3, 4, 6], [0, 0, 0, 0, 0]))).toEqual([
      'one-cluster',
      'one-cluster',
      'no-rows',
    ]);
    expect(reasons(clusterRegression(design, [0.1, 0.1, 0.3, 0.3, 0.3], [0, 1, 0, 1, 2]))).toEqual([
      'no-spread',
      'no-spread',
      'no-rows',
    ]);
    expect(reasons(clusterRegression(design, [2, 2, 3, 4, 5], [0, 1, 0, 1, 2]))).toEqual([
      'no-spread',
      null,
      'no-rows',
    ]);
    expect(reasons(clusterRegression([[1], [1]], [1, 5], [0, 1]))).toEqual([null]);
    expect(reasons(clusterRegression([[1]], [1], [0]))).toEqual(['no-degrees-of-freedom']);
  });

  it('stands in the larger one-way variance where the two-way variance is not positive', () => {
    // Residuals that cancel within every row and every column of a table: V1 = V2 = 0 < V12.
    const y = [1, -1, -1, 1];
    const fit = clusterRegression([[1], [1], [1], [1]], y, [0, 0, 1, 1], { secondClusters: [0, 1, 0, 1] });
    expect(fit.coefficients[0]).toMatchObject({ reason: 'no-spread', se: null });
    const uneven = clusterRegression([[1], [1], [1], [1]], [3, -1, -1, 1], [0, 0, 1, 1], {
      secondClusters: [0, 1, 0, 1],
    });
    const oneWay = clusterRegression([[1], [1], [1], [1]], [3, -1, -1, 1], [0, 0, 1, 1]);
    expect(uneven.coefficients[0]!.twoWayReplaced).toBe(true);
    expect(uneven.coefficients[0]!.se).toBeCloseTo(oneWay.coefficients[0]!.se!, 12);
  });

  it('has a design effect of one when every row is its own cluster in a balanced design', () => {
    const y = [1, 3, 2, 6, 4, 5];
    const fit = clusterRegression([[1], [1], [1], [1], [1], [1]], y, [0, 1, 2, 3, 4, 5]);
    // CR1 is then n/(n-1) * sum r^2 / n^2 = s^2 / n, the ordinary variance.
    expect(fit.coefficients[0]!.designEffect).toBeCloseTo(1, 12);
  });

  it('names the argument it refuses', () => {
    const one = [[1], [1]];
    expect(() => clusterRegression(one, [], [])).toThrow(/^y /);
    expect(() => clusterRegression(one, [1, Number.NaN], [0, 1])).toThrow(/^y .* entry 1 is NaN/);
    expect(() => clusterRegression(one, [1, 2], [0])).toThrow(/^clusters /);
    expect(() => clusterRegression(one, [1, 2], [0, 1], { secondClusters: [0] })).toThrow(/^secondClusters /);
    expect(() => clusterRegression(one, [1, 2], [0, 1], { weights: [1] })).toThrow(/^weights /);
    expect(() => clusterRegression(one, [1, 2], [0, 1], { weights: [1, 0] })).toThrow(/^weights\[1\] /);
    expect(() => clusterRegression(one, [1, 2], [0, 1], { level: 1 })).toThrow(/^level /);
    const fit = clusterRegression(one, [1, 2], [0, 1]);
    expect(() => linearCombination(fit, [1, 2])).toThrow(/^c /);
    expect(() => linearCombination(fit, [Infinity])).toThrow(/^c /);
  });
});
