import { describe, expect, it } from 'vitest';
import { censoredMean } from '../../../shared/stats/index.ts';
import { Mismatches, readReference } from './compare.ts';

interface Case {
  lower: (number | null)[];
  upper: (number | null)[];
  columns: number[][];
  cluster: number[];
  level: number;
  estimate: number[];
  se: number[];
  logSdSe: number;
  sd: number;
  logLikelihood: number;
  interval: [number, number];
  p: number;
  robust: number[];
}

const cases = readReference<Case>('censored-mean');
const boundsOf = ({ lower, upper }: Case) => ({
  lower: lower.map((bound) => bound ?? -Infinity),
  upper: upper.map((bound) => bound ?? Infinity),
});

describe('censoredMean against R 4.2.2 survival::survreg(dist = "gaussian")', () => {
  it('equals estimates, errors, spread and likelihood on 240 seeded samples to 1e-6', () => {
    const off = new Mismatches();
    cases.forEach((c, i) => {
      const result = censoredMean(boundsOf(c), { columns: c.columns, level: c.level });
      // Where the mean is near zero by cancellation its error is what counts.
      const slack = 1e-6 * c.se[0]!;
      const actual = [
        result.se,
        result.sd,
        result.logSdSe,
        result.logLikelihood,
        ...result.coefficients.map(({ se }) => se),
      ];
      const expected = [c.se[0]!, c.sd, c.logSdSe, c.logLikelihood, ...c.se.slice(1)];
      actual.forEach((value, j) => off.check(`case ${i} value ${j}`, value, expected[j]!, 1e-6));
      const located = [
        result.estimate,
        ...result.interval!,
        ...result.coefficients.map((one) => one.estimate),
      ];
      const places = [c.estimate[0]!, ...c.interval, ...c.estimate.slice(1)];
      located.forEach((value, j) => off.check(`case ${i} place ${j}`, value, places[j]!, 1e-6, slack));
      off.check(`case ${i} p`, result.p, c.p, 1e-5, 1e-300);
    });
    expect(off.found).toEqual([]);
    expect(off.compared).toBeGreaterThan(2000);
  });

  it('equals its cluster-robust errors (robust = TRUE, cluster) but for the factor C/(C-1) (n-1)/(n-k)', () => {
    const off = new Mismatches();
    cases.forEach((c, i) => {
      const n = c.lower.length;
      const result = censoredMean(boundsOf(c), { columns: c.columns, clusters: c.cluster });
      const count = new Set(c.cluster).size;
      const factor = Math.sqrt((count / (count - 1)) * ((n - 1) / (n - 1 - c.columns.length)));
      const errors = [result.se, ...result.coefficients.map(({ se }) => se), result.logSdSe];
      errors.forEach((se, j) => off.check(`case ${i} error ${j}`, se! / factor, c.robust[j]!, 1e-6));
    });
    expect(off.found).toEqual([]);
    expect(off.compared).toBeGreaterThan(500);
  });
});
