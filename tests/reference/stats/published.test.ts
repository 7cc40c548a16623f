import { describe, expect, it } from 'vitest';
import { clopperPearson } from '../../../shared/stats/distributions/binomial.ts';
import {
  benjaminiHochberg,
  censoredMean,
  clusterMean,
  cusum,
  ewma,
  hodgesLehmann,
  mcnemar,
  pairedT,
  pool,
  sampleSize,
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

  it('Colditz et al. (1994), BCG trials; DerSimonian and Laird (1986), Paule and Mandel (1982) in R 4.2.2', () => {
    const logRelativeRisks = [
      -0.88931133392, -1.5853886572, -1.3480731483, -1.44155119002, -0.217547322211, -0.786115585819,
      -1.6208982236, 0.0119523335238, -0.469417648738, -1.37134480347, -0.339358828338, 0.445913400571,
      -0.0173139482169,
    ];
    const variances = [
      0.325584765004, 0.194581121398, 0.415367965368, 0.0200100319022, 0.0512101721696, 0.00690561845591,
      0.223017247572, 0.00396157929782, 0.0564342104632, 0.073024793613, 0.0124122139716, 0.5325058452,
      0.071404659684,
    ];
    const { dersimonianLaird, pauleMandel, q, iSquared, ...chosen } = pool(
      logRelativeRisks,
      variances.map(Math.sqrt),
    );
    expectClose(
      [dersimonianLaird.tau2, dersimonianLaird.estimate, dersimonianLaird.se],
      [0.308760262862, -0.714117222073, 0.178742089535],
      1e-7,
    );
    expectClose(
      [pauleMandel.tau2, pauleMandel.estimate, pauleMandel.se],
      [0.318068452205, -0.714968153493, 0.180892191538],
      1e-7,
    );
    expectClose([q, 100 * iSquared], [152.233008082, 92.1173468546], 1e-7);
    expectClose([chosen.tau2, chosen.se], [pauleMandel.tau2, pauleMandel.se], 0);
  });

  it('NIST/SEMATECH e-Handbook 6.3.2.3, tabular CUSUM: sums as printed, out of control from the 14th value', () => {
    const values = [
      324.925, 324.675, 324.725, 324.35, 325.35, 325.225, 324.125, 324.525, 325.225, 324.6, 324.625, 325.15,
      328.325, 327.25, 327.825, 328.5, 326.675, 327.775, 326.875, 328.35,
    ];
    const high = [
      0, 0, 0, 0, 0.0325, 0, 0, 0, 0, 0, 0, 0, 3.0075, 4.94, 7.4475, 10.63, 11.9875, 14.445, 16.0025, 19.035,
    ];
    const low = [0, 0.0075, 0, 0.3325, 0, 0, 0.5575, 0.715, 0.1725, 0.255, 0.3125, 0, 0, 0, 0, 0, 0, 0, 0, 0];
    const result = cusum(values, { target: 325, k: 0.3175, h: 4.1959 });
    const off = new Mismatches();
    high.forEach((value, i) => off.check(`high ${i}`, result.high[i]!, value, 1e-9, 1e-11));
    low.forEach((value, i) => off.check(`low ${i}`, result.low[i]!, value, 1e-9, 1e-11));
    expect(off.found).toEqual([]);
    expect(result.firstAlarmIndex).toBe(13);
    expect(result.alarms).toEqual([{ index: 13, side: 'high', since: 12 }]);
  });

  it('NIST/SEMATECH e-Handbook 6.3.2.4, EWMA chart: means to two decimals, limits to four, in control', () => {
    const values = [
      52, 47, 53, 49.3, 50.1, 47, 51, 50.1, 51.2, 50.5, 49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6,
      52.1,
    ];
    const printed = [
      50.6, 49.52, 50.56, 50.18, 50.16, 49.21, 49.75, 49.85, 50.26, 50.33, 50.11, 49.36, 49.52, 50.05, 49.38,
      49.92, 50.73, 51.23, 51.94, 51.99,
    ];
    const options = { lambda: 0.3, center: 50, sd: 2.0539, k: 3, limits: 'asymptotic' } as const;
    const result = ewma(values, options);
    const off = new Mismatches();
    printed.forEach((value, i) => off.check(`mean ${i}`, result.ewma[i]!, value, 0, 0.0050001));
    off.check('lower limit', result.asymptotic[0], 47.4115, 0, 0.0001);
    off.check('upper limit', result.asymptotic[1], 52.5884, 0, 0.0001);
    expect(off.found).toEqual([]);
    expect(result.firstAlarmIndex).toBeNull();
  });

  it('Tobin (1958), durable goods, left-censored at 0; R 4.2.2 survival::survreg(dist = "gaussian")', () => {
    const observed = [0.7, 3.7, 3.0, 10.4, 1.5, 3.5, 6.1];
    const lower = [...observed, ...new Array<number>(13).fill(-Infinity)];
    const upper = [...observed, ...new Array<number>(13).fill(0)];
    const { estimate, sd, logLikelihood, exact, leftCensored } = censoredMean({ lower, upper });
    expectClose([estimate, sd, logLikelihood], [-2.227439439818, 5.945262217102, -29.492199548178], 1e-6);
    expect([exact, leftCensored]).toEqual([7, 13]);
  });

  it('R 4.2.2 power.t.test(delta = 1, sd = 4, power = 0.8, type = "paired"): 127.516 pairs', () => {
    const { n, whole } = sampleSize({ sd: 4, difference: 1, power: 0.8 });
    expectClose([n], [127.516137398], 1e-4);
    expect(whole).toBe(128);
  });
});
