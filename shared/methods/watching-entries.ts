import { formatDb, formatDbInterval, formatLevel, formatNumber, formatShare } from '../format.ts';
import { comparisonPlanning } from '../comparison/planning.ts';
import { sensitivitySentence } from '../comparison/sensitivity.ts';
import type { VariantAnswer } from '../comparison/sensitivity.ts';
import {
  clusterIds,
  clusterMean,
  clusterRegression,
  confidenceSequence,
  hodgesLehmann,
  pairedT,
  sampleSize,
} from '../stats/index.ts';
import type { MethodEntry } from './method-entry.ts';
import {
  exampleCalls,
  exampleDb,
  exampleFit,
  exampleMeans,
  exampleNights,
  exampleUnits,
  unitsTable,
} from './worked-answer.ts';

const nightly = [
  { night: '14 Nov', values: [2.5, 0.5, 3, 1.5, -0.5, 2] },
  { night: '15 Nov', values: [1, 3.5, 2, 0, 2.5, 1.5] },
  { night: '16 Nov', values: [3, 1, 2.5, 0.5, 2, 1] },
  { night: '17 Nov', values: [1.5, 2.5, 0, 3, 1, 2] },
  { night: '18 Nov', values: [2, 1, 3, 1.5, 2.5, 0.5] },
];

export const peekProof: MethodEntry = {
  id: 'peek-proof',
  title: 'Peek-proof interval',
  asks: 'May I look every morning and stop when I like what I see?',
  text: [
    'An ordinary 95 % interval holds for one look, at a time fixed beforehand. Whoever looks after every night and stops at the first good one is fooled far more often than five times in a hundred.',
    'The peek-proof interval is wider, by as much as it takes: with 95 % it holds the truth at all looks at once. Stop whenever you want. Running trials and everything live use this one.',
    'It works on the means of station-nights in order of time, is drawn from 8 station-nights of 3 nights on, and is tightest at 200, a fortnight of an ordinary band. Its promise is that of large samples: with few station-nights it is approximate.',
  ],
  formula: [
    'mean \u00b1 sd \u00d7 \u221a( 2 (t r\u00b2 + 1) / (t\u00b2 r\u00b2) \u00d7 ln( \u221a(t r\u00b2 + 1) / 0.05 ) )',
    't station-nights so far; r is fixed beforehand so that the interval is tightest at t = 200',
  ],
  example: () => {
    const values = nightly.flatMap((each) => each.values);
    const { line, rho } = confidenceSequence(values, { tunedFor: 200 });
    const looks = nightly
      .map(({ night }, k) => {
        const t = nightly.slice(0, k + 1).reduce((sum, each) => sum + each.values.length, 0);
        const { estimate, interval } = line[t - 1]!;
        return { night, nights: k + 1, t, estimate, interval, once: pairedT(values.slice(0, t)).interval! };
      })
      .filter(({ nights }) => nights >= 3);
    return {
      words: 'Five nights with six station-nights each, looked at after each from the third on:',
      tables: [
        {
          caption: 'Means of station-nights, dB',
          head: ['Night', 'Means'],
          rows: nightly.map((each) => [each.night, each.values.map((db) => formatNumber(db)).join(', ')]),
        },
        {
          caption: 'What each look shows',
          head: ['After', 'Station-nights', 'Mean', 'For one look', 'Peek-proof'],
          rows: looks.map((look) => [
            look.night,
            String(look.t),
            formatDb(look.estimate, 2),
            formatDbInterval(look.once, 2),
            look.interval ? formatDbInterval(look.interval, 2) : 'not yet',
          ]),
        },
      ],
      scale: {
        rows: looks.flatMap(({ night, estimate, interval, once }) => [
          { label: `${night}, one look`, at: estimate, interval: once },
          ...(interval ? [{ label: 'peek-proof', at: estimate, interval }] : []),
        ]),
      },
      results: [{ label: 'r', value: formatNumber(rho, 4) }],
    };
  },
  sources: [
    'Waudby-Smith, Arbour, Sinha, Kennedy and Ramdas (2021), Time-uniform central limit theory and asymptotic confidence sequences, arXiv:2103.06476.',
    'Robbins (1970), Statistical methods related to the law of the iterated logarithm, Annals of Mathematical Statistics 41.',
  ],
  related: ['interval', 'planning'],
};

const plan = { seDb: 0.6, clusters: 40, nights: 5, marginDb: 1 };
const planTable = {
  caption: 'The trial so far',
  head: ['Nights', 'Station-nights', 'Standard error', 'Margin'],
  rows: [
    [String(plan.nights), String(plan.clusters), formatLevel(plan.seDb, 1), formatLevel(plan.marginDb, 1)],
  ],
};

export const planning: MethodEntry = {
  id: 'planning',
  title: 'Nights still needed',
  asks: 'How much longer must we switch before we know?',
  text: [
    'The trial\u2019s own spread says how much one more station-night is worth: standard error times the root of the station-nights so far.',
    'From it follow the station-nights at which the 95 % interval is as narrow as wanted, and those at which a true difference of the margin would be found in 80 of 100 trials. Divided by the station-nights of a night so far, they become nights.',
    'It assumes that the nights to come are like those behind. A dead band or a storm is not foreseen.',
  ],
  formula: ['half-width = t(n \u2212 1) \u00d7 spread / \u221an; solved for n'],
  example: () => {
    const { spreadDb, clustersPerNight, precision, power } = comparisonPlanning(plan);
    return {
      words: 'A trial after five nights:',
      tables: [
        planTable,
        {
          caption: 'What it still needs',
          head: ['Wanted', 'Station-nights', 'More nights'],
          rows: [
            ...precision.map(({ halfWidthDb, clusters, moreNights }) => [
              `interval of \u00b1 ${formatLevel(halfWidthDb, 2)}`,
              String(clusters),
              String(moreNights),
            ]),
            ['to find 1 dB in 80 of 100', String(power.clusters), String(power.moreNights)],
          ],
        },
      ],
      results: [
        { label: 'Spread of one station-night', value: formatLevel(spreadDb, 2) },
        { label: 'Station-nights a night', value: formatNumber(clustersPerNight) },
      ],
    };
  },
  sources: [
    'Student (1908); Owen (1965), A special case of a bivariate non-central t-distribution, Biometrika 52. Equals R: power.t.test(type = "paired").',
  ],
  related: ['detectable', 'interval', 'station-night'],
};

export const detectable: MethodEntry = {
  id: 'detectable',
  title: 'Detectable difference',
  asks: 'If there had been a difference, would we have seen it?',
  text: [
    'The smallest true difference that a trial with this spread and this many station-nights finds in 80 of 100 cases. When an answer is not settled, it says how large a difference would most likely have shown by now.',
    'Found means that the 95 % interval leaves zero out on the right side.',
  ],
  formula: [
    'chance to find D = upper tail of a noncentral t with shift \u221an \u00d7 D / spread; solved for D',
  ],
  example: () => {
    const { spreadDb, detectableDb } = comparisonPlanning(plan);
    const tried = [1, detectableDb, 2.5];
    return {
      words: 'The trial after five nights once more. What it would find, by how large the truth is:',
      tables: [
        planTable,
        {
          caption: 'True difference and chance to find it',
          head: ['True difference', 'Found in'],
          rows: tried.map((difference) => [
            formatDb(difference, 2),
            formatShare(sampleSize({ sd: spreadDb, n: plan.clusters, difference }).power),
          ]),
        },
      ],
      results: [{ label: 'Detectable difference', value: formatDb(detectableDb, 2) }],
    };
  },
  sources: ['Owen (1965), Biometrika 52. Equals R: power.t.test(type = "paired").'],
  related: ['planning', 'verdict'],
};

const heaviest = 'EA8QSH';

function variants(): VariantAnswer[] {
  const one = { cells: exampleDb.map(() => 0), cellCount: 1 };
  const rest = exampleUnits.filter(({ call }) => call !== heaviest);
  const without = clusterMean(
    rest.map(({ db }) => db),
    clusterIds(rest.map(({ call, night }) => `${call} ${night}`)).ids,
  );
  const own = clusterIds(exampleUnits.map(({ call, night }) => `${call} ${night}`));
  const unitsOf = (call: string) => exampleUnits.filter((each) => each.call === call).length;
  const equal = clusterRegression(one, exampleDb, own.ids, {
    weights: exampleUnits.map(({ call }) => 1 / unitsOf(call)),
  }).coefficients[0]!;
  const two = clusterRegression(one, exampleDb, exampleCalls.ids, {
    secondClusters: exampleNights.ids,
  }).coefficients[0]!;
  const ranks = hodgesLehmann(exampleMeans());
  const asAsked = exampleFit();
  const variant = (
    key: string,
    group: VariantAnswer['group'],
    label: string,
    { estimate, interval }: { estimate: number | null; interval: readonly [number, number] | null },
    units = exampleDb.length,
    clusters = own.count,
  ): VariantAnswer => ({
    ...{ key, group, label, units, clusters, verdict: null },
    estimateDb: estimate,
    intervalDb: interval && [interval[0], interval[1]],
  });
  return [
    variant('as-asked', 'as asked', 'As asked', asAsked),
    variant('ranks', 'zeros', 'Ranks', ranks),
    variant('two-way', 'clustering', 'Stations and nights', two),
    variant('without', 'stations', 'Without the heaviest', without, without.n, without.clusters),
    variant('equal', 'weights', 'Every station the same', equal),
  ];
}

export const sensitivity: MethodEntry = {
  id: 'sensitivity',
  title: 'Under other choices (sensitivity)',
  asks: 'Is it the antenna, or is it how we looked?',
  text: [
    'Block length, matching window, guard and the rule about zeros are choices. So is letting a station that was heard all night weigh more than one that was heard once. The panel works the answer out again under other choices, one changed at a time, also without the five stations with most units.',
    'When all of them agree to within the margin, the choices do not matter. When one stands out, look at why before you act on it. Don\u2019t pick the choice that you like best.',
  ],
  example: () => {
    const all = variants();
    return {
      words: 'The twelve units under five choices. With three stations, only the heaviest one is left out.',
      tables: [
        unitsTable(),
        {
          caption: 'Choices and answers',
          head: ['Choice', 'Difference', '95 % interval', 'Units'],
          rows: all.map(({ label, estimateDb, intervalDb, units }) => [
            label,
            formatDb(estimateDb, 2),
            intervalDb ? formatDbInterval(intervalDb, 2) : 'not known',
            String(units),
          ]),
        },
      ],
      scale: {
        marginDb: 1,
        rows: all.map(({ label, estimateDb, intervalDb }) => ({
          ...{ label, at: estimateDb!, interval: intervalDb! },
        })),
      },
      results: [],
      close: sensitivitySentence(all, 1),
    };
  },
  sources: ['Our own choice of variants.'],
  related: ['block', 'guard', 'two-way', 'half-weight'],
};
