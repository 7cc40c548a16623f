import { formatDb, formatDbInterval, formatLevel, formatNumber } from '../format.ts';
import { clusterRegression, equivalence, pairedT, tInterval, verdict } from '../stats/index.ts';
import type { MethodEntry } from './method-entry.ts';
import { exampleCalls, exampleDb, exampleFit, exampleNights, pWords, unitsTable } from './worked-answer.ts';

const clusterSources = [
  'Liang and Zeger (1986), Biometrika 73; Cameron and Miller (2015), Journal of Human Resources 50.',
  'Equals R: sandwich::vcovCL(lm(...), cluster, type = "HC1", cadjust = TRUE).',
];

export const estimate: MethodEntry = {
  id: 'estimate',
  title: 'Difference (estimate)',
  asks: 'By how many dB does this antenna hear better?',
  text: [
    'The answer is the mean of the units, in dB: above zero when the first antenna hears better. When receivers differ, it is the mean that is left after their differences have been taken out.',
    'Both are one small least-squares fit. Each unit is the antenna difference, plus the offsets of the receivers on its two sides, plus what fading and luck add.',
    'The mean is taken of decibels, not of powers: a fade of 20 dB should not outweigh an evening.',
  ],
  formula: ['d = difference + offset(receiver on A) \u2212 offset(receiver on B) + error'],
  example: () => ({
    words:
      'Three stations in three nights; only one receiver pair was used, so that the fit is the plain mean.',
    tables: [unitsTable()],
    scale: { rows: [{ label: 'Units', dots: exampleDb, at: exampleFit().estimate }] },
    results: [
      { label: 'Sum of the units', value: formatDb(exampleDb.reduce((sum, db) => sum + db, 0)) },
      { label: 'Units', value: String(exampleFit().n) },
      { label: 'Difference', value: formatDb(exampleFit().estimate, 3) },
    ],
  }),
  sources: ['Ordinary least squares; receiver offsets as in \u201cReceiver offsets\u201d.'],
  related: ['interval', 'receiver-offsets', 'unit'],
};

export const interval: MethodEntry = {
  id: 'interval',
  title: '95 % interval',
  asks: 'How far off could that number be?',
  text: [
    'If the trial were run many times over, 95 of 100 such intervals would hold the true difference. A narrow interval says that the number can be relied on, a wide one that more nights are needed.',
    'The width comes from how much the station-nights disagree with each other, not from how many units there are. Twenty units of one station in one night count as the one witness they are.',
    'The steps: take each station-night\u2019s sum of deviations from the mean, square and add them up, correct for the number of station-nights, and go out on both sides by the t factor of that number less one.',
  ],
  formula: [
    'se\u00b2 = C / (C \u2212 1) \u00d7 sum over station-nights of (sum of (d \u2212 mean))\u00b2 / n\u00b2',
    'interval = estimate \u00b1 t(C \u2212 1) \u00d7 se; n units, C station-nights',
  ],
  example: () => {
    const fit = exampleFit();
    return {
      words: 'The same twelve units. The spread between the eight station-nights makes the interval.',
      tables: [unitsTable()],
      scale: {
        rows: [
          { label: 'Units', dots: exampleDb },
          { label: '95 % interval', at: fit.estimate, interval: fit.interval! },
        ],
      },
      results: [
        { label: 'Difference', value: formatDb(fit.estimate, 2) },
        { label: 'Standard error', value: formatLevel(fit.se, 3) },
        { label: 'Degrees of freedom', value: String(fit.df) },
        { label: '95 % interval', value: formatDbInterval(fit.interval!, 2) },
      ],
    };
  },
  sources: clusterSources,
  related: ['station-night', 'design-effect', 'p', 'peek-proof'],
};

const swapUnits = [
  { on: '1 on A, 2 on B', z: -1, values: [3.5, 4, 3, 3.5] },
  { on: '2 on A, 1 on B', z: 1, values: [0.5, 1, 0, 0.5] },
];

function fitSwap(parts: readonly (typeof swapUnits)[number][]) {
  const rows = parts.flatMap(({ z, values }) => values.map((db) => ({ z, db })));
  return clusterRegression(
    { cells: rows.map(() => 0), cellCount: 1, columns: [rows.map(({ z }) => z)] },
    rows.map(({ db }) => db),
    rows.map((_, i) => i),
  );
}

const swapTable = {
  caption: 'Eight units of eight station-nights, dB',
  head: ['Receivers', 'Units'],
  rows: swapUnits.map(({ on, values }) => [on, values.map((db) => formatNumber(db)).join(', ')]),
};

export const receiverOffsets: MethodEntry = {
  id: 'receiver-offsets',
  title: 'Receiver offsets',
  asks: 'What if one receiver simply reports more than the other?',
  text: [
    'Two receivers on one antenna report different SNRs, often by a decibel or two. Whatever the receiver on an antenna adds looks like the antenna\u2019s own merit.',
    'When the receivers have changed places, or one receiver has heard both antennas, the two can be told apart. Each receiver then gets an offset per band, estimated in the same fit as the difference, and its uncertainty goes into the interval.',
    'Offsets are given against the receiver of the band with the lowest number. Alternating units need none, because one receiver stands on both sides.',
  ],
  formula: [
    'd = difference + sum of offset \u00d7 z + error',
    'z: +1 for the receiver on A\u2019s side, \u22121 for the one on B\u2019s side, 0 for all others',
  ],
  example: () => {
    const [theta, rho] = fitSwap(swapUnits).coefficients;
    return {
      words: 'Receivers 1 and 2 heard antennas A and B, and were swapped half-way.',
      tables: [swapTable],
      scale: {
        rows: [
          { label: swapUnits[0]!.on, dots: swapUnits[0]!.values },
          { label: swapUnits[1]!.on, dots: swapUnits[1]!.values },
          { label: 'Difference', at: theta!.estimate!, interval: theta!.interval! },
        ],
      },
      results: [
        { label: 'Difference A \u2212 B', value: formatDb(theta!.estimate) },
        { label: '95 % interval', value: formatDbInterval(theta!.interval!, 2) },
        { label: 'Receiver 2 against receiver 1', value: formatDb(rho!.estimate) },
      ],
      close:
        'Before the swap A seemed 3.5 dB ahead, after it 0.5 dB. Half of the gap belongs to the receivers.',
    };
  },
  sources: clusterSources,
  related: ['separability', 'estimate', 'ladder'],
};

export const separability: MethodEntry = {
  id: 'separability',
  title: 'Cannot be separated',
  asks: 'Is it the antenna or the receiver?',
  text: [
    'If antenna A was only ever on receiver 1 and B only on receiver 2, and nothing else links them, every unit measures antenna and receiver together. No amount of such data can tell them apart, so there is no verdict.',
    'The program finds this from the equations, not from a rule of thumb: it asks whether the difference could be changed and the offsets with it, without changing what any unit should be.',
    'The cheapest cures: swap the two antennas between the receivers for about 40 minutes, put both receivers on one antenna for as long, or let one receiver alternate between both antennas, a few minutes each.',
  ],
  example: () => {
    const before = fitSwap(swapUnits.slice(0, 1));
    const after = fitSwap(swapUnits);
    const code = (fit: typeof before, separable: boolean) =>
      verdictWords(
        verdict({
          estimate: fit.coefficients[0]!.estimate,
          interval: fit.coefficients[0]!.interval,
          interval90: null,
          clusters: fit.clusters,
          nights: 3,
          separable,
          minClusters: 4,
        }).code,
      );
    const said = (fit: typeof before) => fit.coefficients[0]!.reason !== 'cannot-be-separated';
    return {
      words: 'The example of the receiver offsets, before and after the swap:',
      tables: [
        swapTable,
        {
          caption: 'What the fit can tell',
          head: ['Data', 'Independent unknowns', 'of', 'Verdict'],
          rows: [
            ['before the swap', String(before.rank), '2', code(before, said(before))],
            ['with the swap', String(after.rank), '2', code(after, said(after))],
          ],
        },
      ],
      results: [
        { label: 'Difference before the swap', value: formatDb(before.coefficients[0]!.estimate) },
        { label: 'Difference with the swap', value: formatDb(after.coefficients[0]!.estimate) },
      ],
    };
  },
  sources: ['Estimable functions of a linear model: Scheff\u00e9 (1959), The Analysis of Variance.'],
  related: ['receiver-offsets', 'components', 'verdict'],
};

export const designEffect: MethodEntry = {
  id: 'design-effect',
  title: 'Cost of repeats (design effect)',
  asks: 'How much do the repeats of one station fool a simple count?',
  text: [
    'The design effect is the variance with station-nights as witnesses, over the variance that a plain count of units would give. At 1 the units are as good as independent; at 4 the interval is twice as wide as a plain count would make it.',
    'Units divided by the design effect is about the number of independent ones.',
  ],
  formula: ['design effect = (cluster standard error)\u00b2 / (plain standard error)\u00b2'],
  example: () => {
    const fit = exampleFit();
    const plain = pairedT(exampleDb);
    return {
      words: 'The twelve units once more: as twelve witnesses, and as eight.',
      tables: [unitsTable()],
      scale: {
        rows: [
          { label: 'as 12 units', at: plain.estimate, interval: plain.interval! },
          { label: 'as 8 station-nights', at: fit.estimate, interval: fit.interval! },
        ],
      },
      results: [
        { label: 'Plain standard error', value: formatLevel(plain.se, 3) },
        { label: 'Cluster standard error', value: formatLevel(fit.se, 3) },
        { label: 'Design effect', value: formatNumber(fit.designEffect!, 2) },
        { label: 'Units worth', value: formatNumber(fit.n / fit.designEffect!) },
      ],
    };
  },
  sources: ['Kish (1965), Survey Sampling; the term as used there.', ...clusterSources],
  related: ['station-night', 'interval', 'half-weight'],
};

export const twoWay: MethodEntry = {
  id: 'two-way',
  title: 'Two-way clustering',
  asks: 'What if a whole night was odd for everybody, or one station odd in every night?',
  text: [
    'Station-nights allow for what one station does in one night. They do not allow for a night in which all paths behaved alike, nor for a station that favours one antenna every night.',
    'Two-way clustering allows for both: whole call signs on one side, whole nights on the other. The two variances are added, and what both count, the station-nights, is taken off once.',
    'It needs many of both: the degrees of freedom are the smaller number of clusters less one. The answer warns when fewer than ten nights or twenty station-nights carry it.',
  ],
  formula: ['V = V(call signs) + V(nights) \u2212 V(station-nights)'],
  example: () => {
    const two = clusterRegression(
      { cells: exampleDb.map(() => 0), cellCount: 1 },
      exampleDb,
      exampleCalls.ids,
      { secondClusters: exampleNights.ids },
    );
    const [one, both] = [exampleFit(), two.coefficients[0]!];
    return {
      words: 'The twelve units come from three call signs and three nights.',
      tables: [
        unitsTable(),
        {
          caption: 'One way and two ways',
          head: ['Clusters', 'Standard error', 'Degrees of freedom', '95 % interval'],
          rows: [
            ['station-nights', formatLevel(one.se, 3), String(one.df), formatDbInterval(one.interval!, 2)],
            [
              'call signs and nights',
              formatLevel(both.se, 3),
              String(two.df),
              formatDbInterval(both.interval!, 2),
            ],
          ],
        },
      ],
      scale: {
        rows: [
          { label: 'station-nights', at: one.estimate, interval: one.interval! },
          { label: 'two-way', at: both.estimate!, interval: both.interval! },
        ],
      },
      results: [],
      close:
        'Three nights are few: the t factor for two degrees of freedom is 4.3, and alone makes the interval wide.',
    };
  },
  sources: [
    'Cameron, Gelbach and Miller (2011), Robust inference with multiway clustering, Journal of Business and Economic Statistics 29.',
  ],
  related: ['interval', 'station-night', 'sensitivity'],
};

export const p: MethodEntry = {
  id: 'p',
  title: 'Chance of such a difference by luck (p)',
  asks: 'Could two equal antennas have produced this?',
  text: [
    'p is the chance that two antennas that hear alike would show a difference at least this large, in either direction, by luck alone. Small means: hard to explain by luck.',
    'It does not say how large the difference is, nor how likely it is to be real. The interval says more, which is why no verdict rests on p.',
  ],
  formula: ['t = estimate / standard error; p = both tails of Student\u2019s t beyond \u00b1t'],
  example: () => {
    const fit = exampleFit();
    return {
      words: 'From the estimate and the standard error of the twelve units:',
      tables: [unitsTable()],
      results: [
        { label: 't', value: formatNumber(fit.t!, 2) },
        { label: 'Degrees of freedom', value: String(fit.df) },
        { label: 'p', value: pWords(fit.p) },
      ],
    };
  },
  sources: ['Student (1908), The probable error of a mean, Biometrika 6.', ...clusterSources],
  related: ['interval', 'adjusted-p', 'signed-rank'],
};

const verdictWords = (code: string) =>
  code.replaceAll('-', ' ').replace(/^([ab]) /, (_, side: string) => `${side.toUpperCase()} `);

const trials: readonly { name: string; estimate: number; se: number; df: number; nights: number }[] = [
  { name: 'first', estimate: 1.8, se: 0.36, df: 60, nights: 14 },
  { name: 'second', estimate: 1.1, se: 0.36, df: 60, nights: 14 },
  { name: 'third', estimate: 0.2, se: 0.3, df: 60, nights: 14 },
  { name: 'fourth', estimate: 0.9, se: 0.7, df: 60, nights: 14 },
  { name: 'fifth', estimate: 2.4, se: 0.5, df: 30, nights: 2 },
];

export const verdictEntry: MethodEntry = {
  id: 'verdict',
  title: 'Margin and verdict',
  asks: 'So, which one?',
  text: [
    'The margin is the smallest difference that matters to you, 1 dB unless changed. The verdict holds the interval against it; of the lines below, the first that applies is the verdict.',
    'A difference can be shown and still be too small to matter: \u201cbetter\u201d says only that zero is ruled out. \u201cNot settled\u201d means that more than one of the other lines is still possible.',
  ],
  rules: {
    caption: 'The first that applies',
    head: ['Verdict', 'When'],
    rows: [
      ['cannot be separated', 'nothing tells the antennas from their receivers'],
      ['not enough yet', 'fewer than 8 station-nights, or than 3 nights'],
      ['clearly better', 'the whole 95 % interval lies beyond the margin'],
      ['better', 'the whole 95 % interval lies beyond zero'],
      ['no practical difference', 'the 90 % interval lies inside the margin'],
      ['not settled', 'anything else'],
    ],
  },
  example: () => {
    const rows = trials.map(({ name, estimate: db, se, df, nights }) => {
      const wide = tInterval(db, se, df, 0.95);
      const narrow = tInterval(db, se, df, 0.9);
      const { code } = verdict({
        ...{ estimate: db, interval: wide, interval90: narrow, nights },
        ...{ clusters: df + 1, margin: 1, separable: true },
      });
      return { name, db, wide, narrow, nights, words: verdictWords(code) };
    });
    return {
      words: 'Five trials with a margin of 1 dB:',
      tables: [
        {
          caption: 'Trials and their verdicts',
          head: ['Trial', 'Difference', '95 % interval', '90 % interval', 'Nights', 'Verdict'],
          rows: rows.map((row) => [
            row.name,
            formatDb(row.db),
            formatDbInterval(row.wide),
            formatDbInterval(row.narrow),
            String(row.nights),
            row.words,
          ]),
        },
      ],
      scale: {
        marginDb: 1,
        rows: rows.map(({ name, words, db, wide }) => ({
          label: `${name}: ${words}`,
          at: db,
          interval: wide,
        })),
      },
      results: [],
    };
  },
  sources: ['Our own table; its line on practical difference after Schuirmann (1987).'],
  related: ['interval', 'equivalence', 'separability'],
};

const alike = [0.2, -0.4, 0.5, 0.1, -0.3, 0.6, 0, -0.2, 0.3, 0.4];

export const equivalenceEntry: MethodEntry = {
  id: 'equivalence',
  title: 'Practical equivalence',
  asks: 'Can I stop caring which of the two I use?',
  text: [
    'A difference that could not be shown is not the same as no difference: perhaps there were too few nights. Equivalence turns the burden of proof round. It asks whether the data rule out a difference as large as the margin, on either side.',
    'Two one-sided tests do it, each at 5 per cent. That is the same as asking whether the 90 % interval lies inside the margin.',
  ],
  formula: [
    't1 = (estimate + margin) / se, t2 = (margin \u2212 estimate) / se; p is the larger of the two upper tails',
  ],
  example: () => {
    const test = equivalence(alike, { margin: 1 });
    return {
      words: 'The means of ten station-nights of two vertical antennas, and a margin of 1 dB:',
      tables: [
        {
          caption: 'Station-night means, dB',
          head: alike.map((_, k) => String(k + 1)),
          rows: [alike.map((db) => formatNumber(db))],
        },
      ],
      scale: {
        marginDb: 1,
        rows: [{ label: '90 % interval', dots: alike, at: test.estimate, interval: test.interval! }],
      },
      results: [
        { label: 'Difference', value: formatDb(test.estimate, 2) },
        { label: '90 % interval', value: formatDbInterval(test.interval!, 2) },
        { label: 'p', value: pWords(test.p) },
        { label: 'Smaller than the margin', value: test.equivalent ? 'proven' : 'not proven' },
      ],
    };
  },
  sources: [
    'Schuirmann (1987), A comparison of the two one-sided tests procedure and the power approach, Journal of Pharmacokinetics and Biopharmaceutics 15, 657\u2013680.',
  ],
  related: ['verdict', 'interval'],
};
