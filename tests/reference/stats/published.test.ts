import { describe, expect, it } from 'vitest';
import { clopperPearson } from '../../../shared/stats/distributions/binomial.ts';
import {
  benjaminiHochberg,
  clusterMean,
  hodgesLehmann,
  mcnemar,
  pairedT,
  signedRank,
} from '../../../shared/stats/index.ts';
import { Mismatches } from './compare.ts';

function expectClose(actual: (number | null)[], expected: number[], relative: number): void {
  const off = new Mismatches();
  expect(actual).toHaveLength(expected.length);
  expected.forEach((value, i) => off.check(`value ${i}`, actual[i]!, value, relative));
  expect(off.found).toEqual([]);
}

/** A first value followed by `times` repetitions of a pair, as NIST describes its sets. */
const repeated = (first: number, pair: [number, number], times: number) => [
  first,
  ...Array.from({ length: 2 * times }, (_, i) => pair[i % 2]!),
];

describe('published worked examples', () => {
  // NIST StRD, univariate summary statistics, certified values of NumAcc1 to NumAcc4.
  it.each([
    { set: 'NumAcc1', values: [10000001, 10000003, 10000002], mean: 10000002, sd: 1, relative: 1e-9 },
    { set: 'NumAcc2', values: repeated(1.2, [1.1, 1.3], 500), mean: 1.2, sd: 0.1, relative: 1e-9 },
    {
      set: 'NumAcc3',
      values: repeated(1000000.2, [1000000.1, 1000000.3], 500),
      mean: 1000000.2,
      sd: 0.1,
      relative: 1e-8,
    },
    {
      set: 'NumAcc4',
      values: repeated(10000000.2, [10000000.1, 10000000.3], 500),
      mean: 10000000.2,
      sd: 0.1,
      relative: 1e-7,
    },
  ])('NIST StRD $set: mean and standard deviation as certified', ({ values, mean, sd, relative }) => {
    const t = pairedT(values);
    expectClose([t.estimate, t.sd], [mean, sd], relative);
    // Each value its own cluster: the CR1 error is then the ordinary sd / sqrt(n).
    const clustered = clusterMean(
      values,
      values.map((_, i) => i),
    );
    expectClose([clustered.estimate, clustered.se! * Math.sqrt(values.length)], [mean, sd], relative);
  });

  it('Student (1908), Biometrika 6, sleep data of Cushny and Peebles; R 4.2.2 t.test', () => {
    const a = [0.7, -1.6, -0.2, -1.2, -0.1, 3.4, 3.7, 0.8, 0.0, 2.0];
    const b = [1.9, 0.8, 1.1, 0.1, -0.1, 4.4, 5.5, 1.6, 4.6, 3.4];
    const { estimate, t, df, p, interval } = pairedT(a, b);
    const expected = [-1.58, -4.062127683, 9, 0.0028328902, -2.459885763277, -0.700114236723];
    expectClose([estimate, t, df, p, ...interval!], expected, 1e-8);
  });

  it('Hollander and Wolfe (1973), p. 29, Hamilton depression scale factor IV; R 4.2.2 wilcox.test', () => {
    const a = [1.83, 0.5, 1.62, 2.48, 1.68, 1.88, 1.55, 3.06, 1.3];
    const b = [0.878, 0.647, 0.598, 2.05, 1.06, 1.29, 1.06, 3.14, 1.29];
    const { wPlus, p, pGreater } = signedRank(a, b);
    expectClose([wPlus, p, pGreater], [40, 0.0390625, 0.01953125], 1e-9);
    const { estimate, interval } = hodgesLehmann(a, b);
    expectClose([estimate, ...interval!], [0.46, 0.01, 0.786], 1e-9);
  });

  it('Darwin (1876), heights of Zea mays, in Fisher (1935), The design of experiments; R 4.2.2', () => {
    const a = [23.5, 12, 21, 22, 19.125, 21.5, 22.125, 20.375, 18.25, 21.625, 23.25, 21, 22.125, 23, 12];
    const b = [17.375, 20.375, 20, 20, 18.375, 18.625, 18.625, 15.25, 16.5, 18, 16.25, 18, 12.75, 15.5, 18];
    const { estimate, t, df, p, interval } = pairedT(a, b);
    const expected = [2.61666666667, 2.147987461, 14, 0.049702944, 0.00389916479912, 5.22943416853421];
    expectClose([estimate, t, df, p, ...interval!], expected, 1e-8);
    const rank = signedRank(a, b);
    expectClose([rank.wPlus, rank.p], [96, 0.0412597656], 1e-8);
    const shift = hodgesLehmann(a, b);
    expectClose([shift.estimate, ...shift.interval!], [3.125, 0.5, 5.1875], 1e-8);
  });

  it('Agresti (1990), p. 350, approval ratings of the prime minister; R 4.2.2 mcnemar.test, binom.test', () => {
    const { chiSquared, chiSquaredCorrected, p, share, shareInterval, oddsRatio } = mcnemar(86, 150);
    expectClose(
      [chiSquared!.statistic, chiSquaredCorrected!.statistic, p, share, ...shareInterval!, oddsRatio],
      [
        17.3559322, 16.81779661, 3.71593614e-5, 0.364406779661, 0.302940423322, 0.429326751846,
        0.573333333333,
      ],
      1e-8,
    );
  });

  it('Benjamini and Hochberg (1995), section 3.1: the first four rejected at 0.05; R 4.2.2 p.adjust', () => {
    const p = [
      0.0001, 0.0004, 0.0019, 0.0095, 0.0201, 0.0278, 0.0298, 0.0344, 0.0459, 0.324, 0.4262, 0.5719, 0.6528,
      0.759, 1,
    ];
    const adjusted = [
      0.0015, 0.003, 0.0095, 0.035625, 0.0603, 0.0638571428571, 0.0638571428571, 0.0645, 0.0765, 0.486,
      0.5811818181818, 0.714875, 0.7532307692308, 0.8132142857143, 1,
    ];
    const result = benjaminiHochberg(p, { q: 0.05 });
    expectClose(result.adjusted, adjusted, 1e-9);
    expect(result.rejected).toEqual(p.map((_, i) => i < 4));
  });

  it('Clopper and Pearson (1934), 9 of 10; R 4.2.2 binom.test', () => {
    expectClose(clopperPearson(9, 10, 0.95), [0.554983882972, 0.997471421456], 1e-9);
    const { interval, shareInterval } = mcnemar(9, 1);
    expectClose(shareInterval!, [0.554983882972, 0.997471421456], 1e-9);
    expectClose(
      interval!,
      [0.554983882972 / (1 - 0.554983882972), 0.997471421456 / (1 - 0.997471421456)],
      1e-9,
    );
  });
});
