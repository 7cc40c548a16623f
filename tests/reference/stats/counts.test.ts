import { describe, expect, it } from 'vitest';
import { benjaminiHochberg, mcnemar } from '../../../shared/stats/index.ts';
import { Mismatches, readReference } from './compare.ts';

interface McnemarCase {
  b: number;
  c: number;
  level: number;
  exact: number;
  mid: number;
  share: [number, number];
  chi: [number, number];
  corrected: [number, number];
}

describe('counts and lists of p against R 4.2.2', () => {
  it('mcnemar equals mcnemar.test and binom.test on 227 tables', () => {
    const off = new Mismatches();
    readReference<McnemarCase>('mcnemar').forEach(({ b, c, level, ...expected }) => {
      const result = mcnemar(b, c, { level });
      const label = `${b}, ${c}`;
      off.check(`${label} exact p`, result.p, expected.exact);
      off.check(`${label} mid-p`, result.midP, expected.mid);
      off.check(`${label} share low`, result.shareInterval![0], expected.share[0]);
      off.check(`${label} share high`, result.shareInterval![1], expected.share[1]);
      off.check(`${label} chi-squared`, result.chiSquared!.statistic, expected.chi[0]);
      off.check(`${label} chi-squared p`, result.chiSquared!.p, expected.chi[1]);
      off.check(`${label} corrected`, result.chiSquaredCorrected!.statistic, expected.corrected[0]);
      off.check(`${label} corrected p`, result.chiSquaredCorrected!.p, expected.corrected[1]);
    });
    expect(off.found).toEqual([]);
    expect(off.compared).toBeGreaterThan(1600);
  });

  it('benjaminiHochberg equals p.adjust on 220 lists', () => {
    const off = new Mismatches();
    readReference<{ p: number[]; adjusted: number[]; rejected: number }>('benjamini-hochberg').forEach(
      ({ p, adjusted, rejected }, i) => {
        const result = benjaminiHochberg(p);
        result.adjusted.forEach((value, j) => off.check(`list ${i} entry ${j}`, value, adjusted[j]!));
        off.check(`list ${i} rejected`, result.rejectedCount, rejected, 0);
      },
    );
    expect(off.found).toEqual([]);
    expect(off.compared).toBeGreaterThan(1000);
  });
});
