import { formatDb, formatDbInterval, formatLevel, formatNumber, formatShare } from '../format.ts';
import { hearingLimits } from '../comparison/censored.ts';
import { halfWeightStations } from '../comparison/fairness.ts';
import { histogram } from '../comparison/stations.ts';
import {
  censoredMean,
  hodgesLehmann,
  majorityByCluster,
  mcnemar,
  pairedT,
  signedRank,
  signTest,
} from '../stats/index.ts';
import type { MethodEntry } from './method-entry.ts';
import { exampleDb, exampleFit, exampleMeans, meansTable, pWords, unitsTable } from './worked-answer.ts';

export const signedRankEntry: MethodEntry = {
  id: 'signed-rank',
  title: 'Rank test',
  asks: 'Would the answer survive if a few readings were wild?',
  text: [
    'The rank test replaces the size of each station-night\u2019s difference by its rank: the smallest counts 1, the next 2, and so on. If the antennas were alike, the ranks of the positive differences would add up to about half of all.',
    'A single reading of 30 dB moves the sum by its rank only. Up to 1,000 station-nights the p is exact, with ties and zeros as they are; beyond that it is a normal approximation.',
    'Differences of exactly zero can be left out before ranking, or ranked with the others and left out afterwards (Pratt\u2019s rule). The comparison says which.',
  ],
  formula: ['W+ = sum of the ranks of |d| over the positive d; p from all ways to give the ranks a sign'],
  example: () => {
    const means = exampleMeans();
    const drop = signedRank(means);
    const pratt = signedRank(means, { zeros: 'pratt' });
    return {
      words: 'The eight station-night means of the twelve units. One is zero, two are 1.5, two are 2.5.',
      tables: [
        meansTable(),
        {
          caption: 'With the zero left out before ranking, or after',
          head: ['Zeros', 'Ranked', 'W+', 'W\u2212', 'p'],
          rows: [
            [
              'left out before',
              String(drop.n),
              formatNumber(drop.wPlus),
              formatNumber(drop.wMinus),
              pWords(drop.p),
            ],
            [
              'left out after',
              String(pratt.n + pratt.zeros),
              formatNumber(pratt.wPlus),
              formatNumber(pratt.wMinus),
              pWords(pratt.p),
            ],
          ],
        },
      ],
      results: [],
      close:
        'All seven are positive: of the 128 ways to give them a sign only two are as extreme, 2 / 128 = 0.016.',
    };
  },
  sources: [
    'Wilcoxon (1945), Individual comparisons by ranking methods, Biometrics Bulletin 1; Pratt (1959), Journal of the American Statistical Association 54.',
    'Equals R: wilcox.test; with ties coin::wilcoxsign_test.',
  ],
  related: ['hodges-lehmann', 'sign-test', 'paired-t'],
};

const fourMeans = [0.5, 1, 2, 6];

export const hodgesLehmannEntry: MethodEntry = {
  id: 'hodges-lehmann',
  title: 'Typical difference by ranks',
  asks: 'By how many dB, if the wild readings had no say?',
  text: [
    'Take every two station-nights, and each with itself, and write down the mean of the two. The middle one of all these means is the typical difference: wild readings hardly move it.',
    'Its interval runs from the k-th smallest to the k-th largest of these means, with k from the rank test. It assumes no bell curve, only that the differences are spread alike on both sides. Under six station-nights even the widest such interval is less sure than 95 %.',
  ],
  formula: ['estimate = median of (d_i + d_j) / 2 over all i \u2264 j'],
  example: () => {
    const four = hodgesLehmann(fourMeans);
    const averages = fourMeans.map((a, i) => fourMeans.slice(i).map((b) => (a + b) / 2));
    const eight = hodgesLehmann(exampleMeans());
    return {
      words: 'Four station-nights, one of them wild, give ten pairwise means:',
      tables: [
        {
          caption: 'Pairwise means, dB',
          head: ['dB', ...fourMeans.map((db) => formatNumber(db))],
          rows: averages.map((row, i) => [
            formatNumber(fourMeans[i]!),
            ...fourMeans.slice(0, i).map(() => ''),
            ...row.map((db) => formatNumber(db, 2)),
          ]),
        },
        meansTable(),
      ],
      scale: {
        rows: [
          { label: 'Four', dots: fourMeans, at: four.estimate },
          { label: 'Eight', dots: exampleMeans(), at: eight.estimate, interval: eight.interval! },
        ],
      },
      results: [
        { label: 'Typical difference of the four', value: formatDb(four.estimate, 3) },
        { label: 'Plain mean of the four', value: formatDb(pairedT(fourMeans).estimate, 3) },
        { label: 'Typical difference of the eight', value: formatDb(eight.estimate, 2) },
        { label: '95 % interval of the eight', value: formatDbInterval(eight.interval!, 2) },
      ],
    };
  },
  sources: [
    'Hodges and Lehmann (1963), Estimates of location based on rank tests, Annals of Mathematical Statistics 34.',
    'Selection among the pairwise means after Johnson and Mizoguchi (1978) and Monahan (1984). Equals R: wilcox.test(conf.int = TRUE).',
  ],
  related: ['signed-rank', 'estimate'],
};

export const pairedTEntry: MethodEntry = {
  id: 'paired-t',
  title: 'Means of station-nights (paired t)',
  asks: 'What if every station-night had one vote?',
  text: [
    'In the main answer a station-night with many units weighs more than one with a single unit. Here each station-night is first made into one mean, and all means count the same.',
    'The classic t test is made of these means. Where it differs much from the main answer, a few busy stations decide that one.',
  ],
  formula: ['t = mean / (sd / root of n), n \u2212 1 degrees of freedom'],
  example: () => {
    const test = pairedT(exampleMeans());
    return {
      words: 'The eight station-nights:',
      tables: [meansTable()],
      scale: {
        rows: [{ label: 'Means', dots: exampleMeans(), at: test.estimate, interval: test.interval! }],
      },
      results: [
        { label: 'Mean', value: formatDb(test.estimate, 3) },
        { label: 'Standard deviation', value: formatLevel(test.sd, 3) },
        { label: 't', value: formatNumber(test.t!, 2) },
        { label: 'p', value: pWords(test.p) },
        { label: 'Main answer, for comparison', value: formatDb(exampleFit().estimate, 3) },
      ],
    };
  },
  sources: ['Student (1908), The probable error of a mean, Biometrika 6. Equals R: t.test(paired = TRUE).'],
  related: ['interval', 'effect-size', 'half-weight'],
};

export const effectSize: MethodEntry = {
  id: 'effect-size',
  title: 'Difference against its spread (dz)',
  asks: 'Would I notice it on an ordinary evening?',
  text: [
    'A difference of 1 dB is plain when station-nights scatter by half a dB, and drowns when they scatter by 5. dz is the mean of the station-night means over their standard deviation.',
    'At 0.2 the two antennas swap the lead all the time, at 2 the better one wins nearly always.',
  ],
  formula: ['dz = mean / standard deviation'],
  example: () => {
    const test = pairedT(exampleMeans());
    return {
      words: 'The eight station-nights:',
      tables: [meansTable()],
      results: [
        { label: 'Mean', value: formatDb(test.estimate, 3) },
        { label: 'Standard deviation', value: formatLevel(test.sd, 3) },
        { label: 'dz', value: formatNumber(test.dz!, 2) },
      ],
    };
  },
  sources: ['Cohen (1988), Statistical Power Analysis for the Behavioral Sciences.'],
  related: ['paired-t', 'chance-better'],
};

export const chanceBetter: MethodEntry = {
  id: 'chance-better',
  title: 'Chance to hear a station better',
  asks: 'If I choose this antenna, how often will it be the right one?',
  text: [
    'The share of station-nights in which the first antenna was ahead, a tie counting as half. It needs no scale at all: it says how often, not by how much.',
  ],
  formula: ['chance = (ahead + ties / 2) / all'],
  example: () => {
    const test = signTest(exampleMeans());
    return {
      words: 'The eight station-nights:',
      tables: [meansTable()],
      results: [
        { label: 'Ahead', value: String(test.positive) },
        { label: 'Behind', value: String(test.negative) },
        { label: 'Ties', value: String(test.ties) },
        { label: 'Chance', value: formatShare(test.chance, 1) },
      ],
    };
  },
  sources: ['Grissom and Kim (2005), Effect Sizes for Research (probability of superiority for pairs).'],
  related: ['sign-test', 'effect-size'],
};

export const signTestEntry: MethodEntry = {
  id: 'sign-test',
  title: 'Counting only who was ahead (sign test)',
  asks: 'What do the wins and losses alone say?',
  text: [
    'If the antennas were alike, the first would be ahead as often as a coin shows heads. The sign test asks how unusual the count of wins would be for a fair coin. Ties are left out.',
    'It trusts the readings least of all the tests, and needs most of them.',
  ],
  formula: ['p = twice the smaller tail of a binomial count with chance 1/2'],
  example: () => {
    const test = signTest(exampleMeans());
    return {
      words: 'The eight station-nights, one of them a tie:',
      tables: [meansTable()],
      results: [
        { label: 'Wins of decided', value: `${test.positive} of ${test.positive + test.negative}` },
        { label: 'p', value: pWords(test.p) },
      ],
      close: 'Seven heads in seven throws: 2 \u00d7 (1/2)^7 = 0.016.',
    };
  },
  sources: ['Arbuthnott (1710), Philosophical Transactions 27. Equals R: binom.test.'],
  related: ['chance-better', 'signed-rank'],
};

const onlyEvents = [
  ['EA8QSH 14 Nov', 'A', 'A', 'B'],
  ['EA8QSH 15 Nov', 'A'],
  ['K1QRB 14 Nov', 'A', 'A'],
  ['UA9QSM 14 Nov', 'B'],
  ['UA9QSM 15 Nov', 'A', 'B'],
] as const;

export const oddsRatio: MethodEntry = {
  id: 'odds-ratio',
  title: 'Heard on one only (odds ratio)',
  asks: 'Which antenna hears the stations that the other misses?',
  text: [
    'Each station-night with heard-only blocks is counted once, for the antenna that had more of them; an even count is left out. If the antennas were alike, either would be the only one as often as the other.',
    'The odds ratio is A only over B only: 3 means three times as often. Its interval is exact. The exact p is on the safe side; the mid-p counts only half of the chance of just this count and comes closer to what it promises.',
  ],
  formula: ['odds ratio = A only / B only; p = twice the smaller tail of a binomial count with chance 1/2'],
  example: () => {
    const rows = onlyEvents.flatMap(([, ...sides], cluster) => sides.map((side) => ({ side, cluster })));
    const majority = majorityByCluster(
      rows.map(({ side }) => (side === 'A' ? 1 : -1)),
      rows.map(({ cluster }) => cluster),
    );
    const test = mcnemar(9, 3);
    return {
      words:
        'How station-nights are counted, and then a season in which A alone heard nine station-nights and B alone three:',
      tables: [
        {
          caption: 'Heard-only blocks by station-night',
          head: ['Station-night', 'Blocks', 'Counts for'],
          rows: onlyEvents.map(([name, ...sides]) => {
            const { onlyA, onlyB } = majorityByCluster(
              sides.map((side) => (side === 'A' ? 1 : -1)),
              sides.map(() => 0),
            );
            return [name, sides.join(', '), onlyA ? 'A' : onlyB ? 'B' : 'neither'];
          }),
        },
        {
          caption: 'The season',
          head: ['Station-nights', 'heard on B', 'missed on B'],
          rows: [
            ['heard on A', 'units', String(test.onlyA)],
            ['missed on A', String(test.onlyB), 'nobody knows'],
          ],
        },
      ],
      results: [
        { label: 'Station-nights of the first table', value: `A ${majority.onlyA}, B ${majority.onlyB}` },
        { label: 'Odds ratio of the season', value: formatNumber(test.oddsRatio!, 2) },
        {
          label: '95 % interval',
          value: `${formatNumber(test.interval![0], 2)} to ${formatNumber(test.interval![1]!, 2)}`,
        },
        { label: 'Exact p', value: pWords(test.p) },
        { label: 'Mid-p', value: pWords(test.midP) },
      ],
      close: 'By hand: 2 \u00d7 (220 + 66 + 12 + 1) / 4096 = 0.146.',
    };
  },
  sources: [
    'McNemar (1947), Psychometrika 12; Clopper and Pearson (1934), Biometrika 26.',
    'Mid-p: Fagerland, Lydersen and Laake (2013), BMC Medical Research Methodology 13:91.',
  ],
  related: ['heard-only', 'censored', 'station-night'],
};

/** 200 spots of one receiver; the weakest four percent are below 6 dB. */
const levelCounts = [2, 2, 4, 12, 30, 50, 60, 40];
const lowestDb = 3;
const bothDb = [2, 3, 1, 4, 2.5];
const heardOnAOnly = [12, 10, 9];

export const censored: MethodEntry = {
  id: 'censored',
  title: 'With the stations heard on one only (censored view)',
  asks: 'Does leaving out the stations that one antenna missed flatter the worse one?',
  text: [
    'The main answer uses stations that both antennas heard. The weakest stations, where the better antenna shows its worth, are missing from it, and so it errs toward zero.',
    'A station heard at 12 dB on A and not at all on B still says something: its difference is at least 12 less the weakest level that B\u2019s receiver ever reports. That level, the hearing limit, is the 2nd percentile of the receiver\u2019s SNRs on the band, from 100 spots on.',
    'The censored view fits the bell curve under which all readings together are most likely: the differences as they are, the others as \u201cat least\u201d or \u201cat most\u201d. It trusts the bell curve, which the main answer does not need. If the two differ by more than the margin, the answer says why.',
  ],
  formula: [
    'heard on A only: d \u2265 SNR on A \u2212 limit on B; heard on B only: d \u2264 limit on A \u2212 SNR on B',
  ],
  example: () => {
    const limit = hearingLimits([
      {
        ...{ spots: [], doubles: 0, listening: [] },
        levels: [{ receiver: 2, band: 160, lowestDb, spots: levelCounts }],
      },
    ]).get('2 160')!;
    const atLeast = heardOnAOnly.map((db) => db - limit);
    const fit = censoredMean({
      lower: [...bothDb, ...atLeast],
      upper: [...bothDb, ...atLeast.map(() => Infinity)],
    });
    const plain = pairedT(bothDb);
    return {
      words:
        'Five stations heard on both antennas, three on A only. First the hearing limit of B\u2019s receiver:',
      tables: [
        {
          caption: 'Spots of the receiver by SNR',
          head: ['SNR, dB', ...levelCounts.map((_, k) => String(lowestDb + k))],
          rows: [['spots', ...levelCounts.map(String)]],
        },
        {
          caption: 'What each station says, dB',
          head: ['Station', 'on A', 'on B', 'Difference'],
          rows: [
            ...bothDb.map((db, k) => [String(k + 1), 'heard', 'heard', formatNumber(db)]),
            ...heardOnAOnly.map((db, k) => [
              String(bothDb.length + k + 1),
              formatNumber(db, 0),
              'missed',
              `at least ${formatNumber(atLeast[k]!)}`,
            ]),
          ],
        },
      ],
      scale: {
        rows: [
          { label: 'heard on both', dots: bothDb, at: plain.estimate, interval: plain.interval! },
          { label: 'with all eight', at: fit.estimate!, interval: fit.interval! },
        ],
      },
      results: [
        { label: 'Hearing limit', value: formatLevel(limit, 2) },
        { label: 'Main answer', value: formatDb(plain.estimate) },
        { label: 'Censored view', value: formatDb(fit.estimate, 2) },
        { label: '95 % interval', value: formatDbInterval(fit.interval!, 2) },
      ],
    };
  },
  sources: [
    'Tobin (1958), Estimation of relationships for limited dependent variables, Econometrica 26; Olsen (1978), Econometrica 46.',
    'Equals R: survival::survreg(Surv(lower, upper, type = "interval2") ~ 1, dist = "gaussian").',
  ],
  related: ['heard-only', 'odds-ratio', 'estimate'],
};

const unitsPerStation = [40, 25, 12, 9, 6, 4, 3, 1];

export const halfWeight: MethodEntry = {
  id: 'half-weight',
  title: 'Weight of single stations',
  asks: 'Do a few strong stations decide this?',
  text: [
    'The fewest stations that together hold half of all units. A small number means that the answer is about a few strong stations, and their direction and power, rather than about the band.',
    'The answer warns when three stations or fewer of at least eight hold half. The sensitivity panel shows what happens without the five heaviest.',
  ],
  example: () => ({
    words: 'A trial with eight stations and 100 units:',
    tables: [
      {
        caption: 'Units by station',
        head: unitsPerStation.map((_, k) => `No. ${k + 1}`),
        rows: [unitsPerStation.map(String)],
      },
    ],
    results: [
      {
        label: 'Half of all units is held by',
        value: `${halfWeightStations(unitsPerStation)} of ${unitsPerStation.length} stations`,
      },
    ],
  }),
  sources: ['Our own rule.'],
  related: ['design-effect', 'sensitivity', 'paired-t'],
};

export const histogramEntry: MethodEntry = {
  id: 'histogram',
  title: 'The differences in bars',
  asks: 'Is it the same for all, or better for some and worse for others?',
  text: [
    'Every unit falls into a bar of one decibel (two where the range is wide), receiver offsets taken out. The bars are centred on whole decibels, so that \u201cno difference\u201d has a bar of its own.',
    'One hill says that the antennas differ in the same way for all. Two hills say that the answer depends on something: look at direction and hour. The estimate and its interval are drawn over it, the margin is shaded.',
  ],
  example: () => {
    const { bins, binWidthDb } = histogram(Float64Array.from(exampleDb));
    return {
      words: 'The twelve units of the other examples:',
      tables: [
        unitsTable(),
        {
          caption: 'Units by difference',
          head: ['From', 'to below', 'Units'],
          rows: bins.map(({ fromDb, units }) => [
            formatDb(fromDb),
            formatDb(fromDb + binWidthDb),
            String(units),
          ]),
        },
      ],
      results: [],
    };
  },
  sources: ['Our own choice of bars.'],
  related: ['estimate', 'interval', 'map-cells'],
};
