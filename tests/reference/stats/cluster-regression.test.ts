import { describe, expect, it } from 'vitest';
import { clusterMean, clusterRegression, linearCombination } from '../../../shared/stats/index.ts';
import { Mismatches, readReference } from './compare.ts';

type Maybe = (number | null)[];
interface Case {
  kind: 'mean' | 'cells' | 'dense' | 'deficient';
  level: number;
  y: number[];
  cluster: number[];
  second: number[] | null;
  weights: number[] | null;
  cells: number[] | null;
  cellCount: number;
  columns?: number[][];
  df: number;
  rank: number;
  estimate: Maybe;
  se: Maybe;
  p: Maybe;
  lo: Maybe;
  hi: Maybe;
  naive: Maybe;
  contrast: [number, number] | null;
}

const cases = readReference<Case>('cluster-regression');
const twoWayCases = readReference<Case>('cluster-two-way');
const means = [...readReference<Case>('cluster-mean'), ...cases.filter(({ kind }) => kind === 'mean')];
const designOf = ({ cells, cellCount, columns = [] }: Case) =>
  cells ? { cells, cellCount, columns } : { columns };
const optionsOf = ({ level, second, weights }: Case) => ({
  level,
  secondClusters: second ?? undefined,
  weights: weights ?? undefined,
});

describe('clusterRegression against R 4.2.2 lm with sandwich::vcovCL(type = "HC1", cadjust = TRUE)', () => {
  it.each([
    ['260 seeded designs', cases, 4000],
    ['110 more with two ways', twoWayCases, 1500],
  ])('equals estimates, standard errors, p, intervals and naive errors on %s', (_, list, least) => {
    const off = new Mismatches();
    let replaced = 0;
    list.forEach((c, i) => {
      const fit = clusterRegression(designOf(c), c.y, c.cluster, optionsOf(c));
      const scale = Math.max(...c.y.map(Math.abs));
      off.check(`case ${i} df`, fit.df, c.df, 0);
      off.check(`case ${i} rank`, fit.rank, c.rank, 0);
      fit.coefficients.forEach((coefficient, j) => {
        const label = `case ${i} (${c.kind}) coefficient ${j}`;
        off.check(`${label} estimate`, coefficient.estimate, c.estimate[j]!, 1e-8, 1e-13 * scale);
        expect(coefficient.reason).toBe(c.estimate[j] === null ? 'cannot-be-separated' : null);
        if (coefficient.estimate === null) return;
        if (coefficient.twoWayReplaced) {
          // R gives no standard error either: its two-way variance is negative there.
          off.check(`${label} two-way`, c.se[j]!, null);
          replaced += 1;
          return;
        }
        off.check(`${label} se`, coefficient.se, c.se[j]!);
        off.check(`${label} p`, coefficient.p, c.p[j]!, 1e-8, 1e-280);
        off.check(`${label} low`, coefficient.interval![0], c.lo[j]!, 1e-8, 1e-12 * scale);
        off.check(`${label} high`, coefficient.interval![1], c.hi[j]!, 1e-8, 1e-12 * scale);
        off.check(`${label} design effect`, coefficient.designEffect, (c.se[j]! / c.naive[j]!) ** 2);
      });
      if (c.contrast) {
        const weights = c.estimate.map((__, j) => (j === 0 ? 1 : j === c.estimate.length - 1 ? -1 : 0));
        const difference = linearCombination(fit, weights);
        off.check(`case ${i} contrast`, difference!.estimate, c.contrast[0], 1e-8, 1e-13 * scale);
        off.check(`case ${i} contrast se`, difference!.se, c.contrast[1]);
      }
    });
    expect(off.found).toEqual([]);
    expect(off.compared).toBeGreaterThan(least);
    // R has no standard error exactly where its two-way variance is negative.
    const withoutError = list.flatMap((c) => c.se.filter((se, j) => se === null && c.estimate[j] !== null));
    expect(replaced).toBe(withoutError.length);
  });

  it('is checked on more than 200 fits with two ways', () => {
    expect([...cases, ...twoWayCases].filter(({ second }) => second !== null).length).toBeGreaterThan(200);
  });

  it('clusterMean equals the intercept-only fits, one way and two ways', () => {
    const off = new Mismatches();
    means.forEach((c, i) => {
      const result = clusterMean(c.y, c.cluster, optionsOf(c));
      const scale = 1e-13 * Math.max(...c.y.map(Math.abs));
      off.check(`mean ${i} estimate`, result.estimate, c.estimate[0]!, 1e-8, scale);
      if (result.twoWayReplaced) {
        off.check(`mean ${i} two-way`, c.se[0]!, null);
        return;
      }
      off.check(`mean ${i} se`, result.se, c.se[0]!);
      off.check(`mean ${i} p`, result.p, c.p[0]!);
      off.check(`mean ${i} low`, result.interval![0], c.lo[0]!, 1e-8, 10 * scale);
      off.check(`mean ${i} high`, result.interval![1], c.hi[0]!, 1e-8, 10 * scale);
    });
    expect(off.found).toEqual([]);
    expect(means.length).toBeGreaterThanOrEqual(300);
    expect(off.compared).toBeGreaterThan(1200);
  });
});
