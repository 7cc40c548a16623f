import { describe, expect, it } from 'vitest';
import { cusum, ewma } from '../../../shared/stats/index.ts';
import { Mismatches, readReference } from './compare.ts';

interface Case {
  x: number[];
  target: number;
  k: number;
  h: number;
  head: boolean;
  at: number[];
  high: number[];
  low: number[];
  first?: number | null;
  lambda: number;
  mean: number[];
  upper: number[];
  lower: number[];
  firstBeyond?: number | null;
}

const cases = readReference<Case>('monitoring');
/** The reference is kept to ten decimals. */
const rounding = 1e-9;

describe('charts of running means against R 4.2.2', () => {
  it('cusum equals Reduce on 220 seeded lists', () => {
    const off = new Mismatches();
    cases.forEach((c, i) => {
      const result = cusum(c.x, { target: c.target, k: c.k, h: c.h, fastInitialResponse: c.head });
      c.at.forEach((t, j) => {
        off.check(`case ${i} high ${t}`, result.high[t - 1]!, c.high[j]!, 1e-8, rounding);
        off.check(`case ${i} low ${t}`, result.low[t - 1]!, c.low[j]!, 1e-8, rounding);
      });
      off.check(`case ${i} first alarm`, result.firstAlarmIndex, c.first ?? null, 0);
    });
    expect(off.found).toEqual([]);
  });

  it('ewma equals stats::filter(method = "recursive") with the limits of each time on 220 seeded lists', () => {
    const off = new Mismatches();
    cases.forEach((c, i) => {
      const result = ewma(c.x, { lambda: c.lambda, center: c.target, sd: 1.3 });
      c.at.forEach((t, j) => {
        off.check(`case ${i} mean ${t}`, result.ewma[t - 1]!, c.mean[j]!, 1e-8, rounding);
        off.check(`case ${i} upper ${t}`, result.upper[t - 1]!, c.upper[j]!);
        off.check(`case ${i} lower ${t}`, result.lower[t - 1]!, c.lower[j]!);
      });
      off.check(`case ${i} first alarm`, result.firstAlarmIndex, c.firstBeyond ?? null, 0);
    });
    expect(off.found).toEqual([]);
  });
});
