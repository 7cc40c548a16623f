import { describe, expect, it } from 'vitest';
import { equivalence, hodgesLehmann, pairedT, signedRank, signTest } from '../../../shared/stats/index.ts';
import { Mismatches, readReference } from './compare.ts';

type Three = [twoSided: number, greater: number, less: number];
interface Case {
  d: number[];
  level: number;
  margin: number;
  t: [mean: number, sd: number, t: number, df: number, p: number, lo: number, hi: number];
  w: number;
  exact: Three | null;
  pratt: Three | null;
  normal: Three;
  hl: [estimate: number, lo: number, hi: number];
  achieved: number;
  sign: [p: number, lo: number, hi: number, greater: number, less: number];
  tost: [above: number, below: number, lo: number, hi: number];
}

/** Lists of up to a thousand whole numbers; low and high are averages ten places around R's exact rank. */
interface LongCase {
  d: number[];
  exact: Three;
  pratt: Three;
  median: number;
  low: number[];
  high: number[];
}

const cases = readReference<Case>('paired');
const size = (d: number[]) => Math.max(...d.map(Math.abs));
const three = (result: { p: number; pGreater: number; pLess: number }): Three => [
  result.p,
  result.pGreater,
  result.pLess,
];

describe('paired estimators against R 4.2.2 on 220 seeded samples', () => {
  it('pairedT equals t.test', () => {
    const off = new Mismatches();
    cases.forEach(({ d, level, t }, i) => {
      const result = pairedT(d, { level });
      const actual = [result.estimate, result.sd, result.t, result.df, result.p, ...result.interval!];
      actual.forEach((value, j) => off.check(`case ${i} value ${j}`, value, t[j]!, 1e-8, 1e-12 * size(d)));
    });
    expect(off.found).toEqual([]);
  });

  it('signedRank exact equals wilcox.test, and coin::wilcoxsign_test where there are ties or zeros', () => {
    const off = new Mismatches();
    for (const [i, { d, exact, pratt, w }] of cases.entries()) {
      const dropped = signedRank(d);
      off.check(`case ${i} W`, dropped.wPlus, w);
      if (!exact || !pratt) continue;
      three(dropped).forEach((p, j) => off.check(`case ${i} p ${j}`, p, exact[j]!));
      three(signedRank(d, { zeros: 'pratt' })).forEach((p, j) =>
        off.check(`case ${i} Pratt ${j}`, p, pratt[j]!),
      );
    }
    expect(off.found).toEqual([]);
    expect(off.compared).toBeGreaterThan(1200);
  });

  it('signedRank normal equals wilcox.test(exact = FALSE, correct = TRUE)', () => {
    const off = new Mismatches();
    cases.forEach(({ d, normal }, i) =>
      three(signedRank(d, { method: 'normal' })).forEach((p, j) =>
        off.check(`case ${i} p ${j}`, p, normal[j]!),
      ),
    );
    expect(off.found).toEqual([]);
  });

  // Two exact distributions of a thousand ranks: a busy machine needs longer than the usual limit.
  it(
    'signedRank switches from exact to normal above 1,000 differences and equals R on both sides',
    { timeout: 60_000 },
    () => {
      const off = new Mismatches();
      readReference<{ d: number[]; exact: boolean; p: Three }>('signed-rank-large').forEach(
        ({ d, exact, p }, i) => {
          const result = signedRank(d);
          expect(result.method).toBe(exact ? 'exact' : 'normal');
          three(result).forEach((value, j) => off.check(`case ${i} p ${j}`, value, p[j]!));
        },
      );
      expect(off.found).toEqual([]);
    },
  );

  // Twenty exact distributions of up to a thousand tied ranks, two zero rules each.
  it(
    'signedRank and hodgesLehmann equal coin::wilcoxsign_test and listed averages on long tied lists',
    { timeout: 60_000 },
    () => {
      const off = new Mismatches();
      readReference<LongCase>('ranks-tied').forEach(({ d, exact, pratt, median, low, high }, i) => {
        three(signedRank(d)).forEach((p, j) => off.check(`case ${i} p ${j}`, p, exact[j]!, 1e-8, 1e-14));
        three(signedRank(d, { zeros: 'pratt' })).forEach((p, j) =>
          off.check(`case ${i} Pratt ${j}`, p, pratt[j]!, 1e-8, 1e-14),
        );
        const { estimate, interval } = hodgesLehmann(d);
        off.check(`case ${i} median`, estimate, median, 0);
        // R's exact rank, or within ten places of it where ours is a normal approximation.
        const slack = d.length <= 200 ? [1, 1] : [0, 2];
        const within = (end: number, places: number[]) =>
          end >= places[slack[0]!]! && end <= places[slack[1]!]!;
        if (!within(interval![0], low)) off.found.push(`case ${i} low ${interval![0]}, R has ${low[1]}`);
        if (!within(interval![1], high)) off.found.push(`case ${i} high ${interval![1]}, R has ${high[1]}`);
      });
      expect(off.found).toEqual([]);
    },
  );

  it('hodgesLehmann equals wilcox.test(exact = TRUE, conf.int = TRUE), and sorted Walsh averages with ties', () => {
    const off = new Mismatches();
    cases.forEach(({ d, level, hl, achieved }, i) => {
      const result = hodgesLehmann(d, { level });
      off.check(`case ${i} estimate`, result.estimate, hl[0], 1e-8, 1e-12 * size(d));
      if (result.method === 'exact') {
        off.check(`case ${i} low`, result.interval![0], hl[1], 1e-8, 1e-12 * size(d));
        off.check(`case ${i} high`, result.interval![1], hl[2], 1e-8, 1e-12 * size(d));
        off.check(`case ${i} achieved level`, result.achievedLevel, achieved);
      } else {
        // Beyond 200 values k is a normal approximation: R's exact ends to within 0.5 % of the width.
        const slack = 0.005 * (hl[2] - hl[1]);
        off.check(`case ${i} low`, result.interval![0], hl[1], 0, slack);
        off.check(`case ${i} high`, result.interval![1], hl[2], 0, slack);
      }
    });
    expect(off.found).toEqual([]);
  });

  it('signTest equals binom.test', () => {
    const off = new Mismatches();
    cases.forEach(({ d, level, sign }, i) => {
      const { p, interval, pGreater, pLess } = signTest(d, { level });
      [p, ...interval!, pGreater, pLess].forEach((value, j) =>
        off.check(`case ${i} value ${j}`, value, sign[j]!),
      );
    });
    expect(off.found).toEqual([]);
  });

  it('equivalence equals two one-sided t.test and its 90 % interval', () => {
    const off = new Mismatches();
    cases.forEach(({ d, margin, tost }, i) => {
      const result = equivalence(d, { margin });
      [result.pAboveLower, result.pBelowUpper, ...result.interval!].forEach((value, j) =>
        off.check(`case ${i} value ${j}`, value, tost[j]!, 1e-8, 1e-12 * size(d)),
      );
      expect(result.equivalent).toBe(Math.max(tost[0], tost[1]) < 0.05);
    });
    expect(off.found).toEqual([]);
  });
});
