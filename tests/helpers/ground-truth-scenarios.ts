import type { ComparisonQuestionInput } from '../../shared/contracts/comparison.ts';
import type { Random } from '../../shared/stats/index.ts';
import type { Experiment } from './ground-truth-experiment.ts';
import {
  alarm,
  biasOf,
  cells,
  coverage,
  equivalenceError,
  ladderCoverage,
  peeks,
  rankCoverage,
  type Figure,
} from './ground-truth-figures.ts';
import type { World } from './ground-truth-world.ts';

export const themes = [
  'Intervals and verdicts',
  'Looking every morning',
  'When nights or stations truly differ',
  'Other views',
  'Stations near the threshold',
] as const;
export type Theme = (typeof themes)[number];
const [intervals, watching, differing, views, threshold] = themes;

/** One kind of experiment, repeated, and what is counted over the repetitions. */
export interface Scenario {
  key: string;
  theme: Theme;
  /** What the world is like, for the table. */
  title: string;
  /** Drawn anew for each experiment where the truth itself varies. */
  world: (random: Random) => World;
  question?: Partial<ComparisonQuestionInput>;
  figures: readonly Figure[];
}

/**
 * The ordinary trial: a fortnight on one band, six hours a night, sixty stations of which two in five are
 * on the air in a night, most of them for three quarters of an hour; some 300 station-nights and 1,300
 * units. Receiver 2 reports 2 dB less than receiver 1. Stations are well above the threshold.
 */
export const ordinary: World = {
  nights: 14,
  hoursPerNight: 6,
  gainsDb: [0, 0],
  offsetsDb: [0.6, -1.4],
  plan: 'swap',
  stations: 60,
  activeShare: 0.4,
  stayingPower: 0.6,
  meanStayBlocks: 4,
  callGapSeconds: [90, 240],
  levelDb: { mean: 28, sd: 4, nightSd: 2 },
  fading: {
    sharedSlowDb: 2.5,
    sharedFastDb: 2.5,
    nightDeviationDb: 1.3,
    unsharedSlowDb: 1.2,
    unsharedFastDb: 2,
    unsteadiness: null,
    measurementDb: 1,
  },
  stationDifferenceSdDb: 0,
  nightDifferenceSdDb: 0,
  sectorDifferencesDb: null,
  threshold: { atDb: 4, softnessDb: 0.67, missedShare: 0.06 },
};

/** Stations hardly above the threshold of antenna B, signals that change little within a block. */
const weak: World = {
  ...ordinary,
  gainsDb: [4, 0],
  levelDb: { mean: 3, sd: 3, nightSd: 2 },
  fading: {
    ...{ sharedSlowDb: 2, sharedFastDb: 0.5, nightDeviationDb: 1.3, unsharedSlowDb: 1.2 },
    ...{ unsharedFastDb: 0.5, unsteadiness: null, measurementDb: 0.5 },
  },
  threshold: { atDb: 4, softnessDb: 0, missedShare: 0 },
};
const fast = { sharedFastDb: 2.5, unsharedFastDb: 2, measurementDb: 1 };
const oneCall = { callGapSeconds: [700, 1100], stations: 100 } as const;
/** What the censored fit assumes: how much B lags behind does not depend on how strong A is, or on luck. */
const steadyA: World = {
  ...weak,
  ...oneCall,
  fading: { ...weak.fading, unsteadiness: [0, Math.SQRT2], measurementDb: 0 },
};

const gap = ([a, b]: readonly number[]): number => a! - b!;

/** Where the truth is the difference of the two gains. */
function plain(
  theme: Theme,
  key: string,
  title: string,
  world: World,
  figures: (truthDb: (experiment: Experiment) => number) => readonly Figure[],
  question: Partial<ComparisonQuestionInput> = {},
): Scenario {
  return { theme, key, title, world: () => world, question, figures: figures(() => gap(world.gainsDb)) };
}

export const scenarios: readonly Scenario[] = [
  plain(intervals, 'no-difference', 'No difference; receivers exchanged evenly', ordinary, (truth) => [
    coverage(truth),
    alarm('better'),
    alarm('clearly better'),
  ]),
  plain(
    intervals,
    'uneven',
    'No difference; antenna A on the better receiver two blocks of three',
    { ...ordinary, plan: 'swap-unequal' },
    (truth) => [coverage(truth), alarm('better')],
  ),
  plain(intervals, 'three-db', 'A 3 dB better', { ...ordinary, gainsDb: [3, 0] }, (truth) => [
    coverage(truth),
  ]),
  plain(
    intervals,
    'alternating',
    'A 1.5 dB better; one receiver, alternating every 2½ minutes',
    { ...ordinary, gainsDb: [1.5, 0], plan: 'alternate' },
    (truth) => [coverage(truth)],
  ),
  plain(
    intervals,
    'few-heavy',
    'No difference; a few stations make most of the units',
    { ...ordinary, stayingPower: 1.2 },
    (truth) => [coverage(truth), alarm('better')],
  ),
  plain(
    intervals,
    'small',
    'No difference; a small trial of 4 nights and 10 stations, some 16 station-nights',
    { ...ordinary, nights: 4, stations: 10 },
    (truth) => [coverage(truth), alarm('better')],
  ),
  plain(intervals, 'margin', 'A better by exactly the margin, 1 dB', { ...ordinary, gainsDb: [1, 0] }, () => [
    equivalenceError,
    alarm('clearly better', 0.025),
  ]),
  plain(watching, 'peeking', 'No difference; 20 nights, looked at after every one', season(20), (truth) =>
    peeks(truth, true),
  ),
  plain(
    watching,
    'peeking-nights',
    'The same, nights truly differing by 0.8 dB',
    { ...season(20), nightDifferenceSdDb: 0.8 },
    (truth) => peeks(truth, false),
  ),
  plain(
    differing,
    'nights',
    'No difference on average; nights truly differ by 0.8 dB; station-nights as clusters',
    { ...ordinary, nightDifferenceSdDb: 0.8 },
    (truth) => [coverage(truth, null)],
  ),
  plain(
    differing,
    'nights-two-way',
    'The same; two-way clustering',
    { ...ordinary, nightDifferenceSdDb: 0.8 },
    (truth) => [coverage(truth)],
    { clustering: 'two-way' },
  ),
  {
    theme: differing,
    key: 'stations',
    title: 'Stations truly differ by 1.5 dB; truth: the stations that were compared',
    world: () => ({ ...ordinary, stationDifferenceSdDb: 1.5 }),
    figures: [coverage((experiment) => experiment.lastingOfComparedDb, null)],
  },
  plain(
    differing,
    'all-stations',
    'The same; truth: all stations there could be',
    { ...ordinary, stationDifferenceSdDb: 1.5 },
    (truth) => [coverage(truth, null)],
  ),
  plain(
    differing,
    'all-stations-two-way',
    'The same; two-way clustering',
    { ...ordinary, stationDifferenceSdDb: 1.5 },
    (truth) => [coverage(truth)],
    { clustering: 'two-way' },
  ),
  plain(
    views,
    'rank',
    'A 1.5 dB better; 8 nights, 30 stations',
    { ...ordinary, gainsDb: [1.5, 0], nights: 8, stations: 30 },
    (truth) => [rankCoverage(truth)],
  ),
  plain(
    views,
    'rank-alternating',
    'The same; one receiver, alternating',
    { ...ordinary, gainsDb: [1.5, 0], nights: 8, stations: 30, plan: 'alternate' },
    (truth) => [rankCoverage(truth)],
  ),
  {
    theme: views,
    key: 'sectors',
    title:
      'A 1 dB better on average, each of 12 sectors differing from that by 0.6 dB; 10 nights, 60 stations',
    world: (random) => ({
      ...ordinary,
      nights: 10,
      sectorDifferencesDb: Array.from({ length: 12 }, () => 1 + 0.6 * random.normal()),
    }),
    figures: cells,
  },
  plain(
    views,
    'ladder',
    'Five antennas, 2 dB from best to worst, rotating on three receivers',
    { ...ordinary, gainsDb: [1.2, 0.5, 0, -0.4, -0.8], offsetsDb: [0.6, -1.4, 0.2], plan: 'rotate' },
    () => [ladderCoverage([1.2, 0.5, 0, -0.4, -0.8])],
  ),
  plain(
    threshold,
    'censored-model',
    'As the fit assumes: A 4 dB better and steady, half of the stations heard on A alone, sharp threshold, one call a block',
    steadyA,
    (truth) => biasOf(truth, true),
  ),
  plain(
    threshold,
    'censored-one-call',
    'The same, both antennas fading alike',
    { ...weak, ...oneCall },
    (truth) => biasOf(truth, false),
  ),
  plain(
    threshold,
    'censored-missed',
    'The same, and 6 % of calls missed however strong',
    { ...weak, ...oneCall, threshold: { ...weak.threshold, missedShare: 0.06 } },
    (truth) => biasOf(truth, false),
  ),
  plain(
    threshold,
    'censored',
    'Both antennas fading alike, sharp threshold, some five calls a block, changing by 0.5 dB from call to call',
    weak,
    (truth) => biasOf(truth, true),
  ),
  plain(
    threshold,
    'censored-soft',
    'The same, threshold soft: from 12 to 88 % of calls heard within 2.7 dB',
    { ...weak, threshold: { ...weak.threshold, softnessDb: 0.67 } },
    (truth) => biasOf(truth, false),
  ),
  plain(
    threshold,
    'censored-fast',
    'Sharp again, each antenna’s signal changing by 2 dB from call to call',
    { ...weak, fading: { ...weak.fading, ...fast } },
    (truth) => biasOf(truth, false),
  ),
  plain(
    threshold,
    'censored-all',
    'All of it: soft, changing from call to call, 6 % of calls missed',
    { ...weak, fading: { ...weak.fading, ...fast }, threshold: ordinary.threshold },
    (truth) => biasOf(truth, false),
  ),
  plain(
    threshold,
    'censored-ordinary',
    'All of it on an ordinary band: most stations far above the threshold',
    { ...ordinary, gainsDb: [4, 0], levelDb: { mean: 14, sd: 7, nightSd: 2 } },
    (truth) => biasOf(truth, false),
  ),
];

function season(nights: number): World {
  return { ...ordinary, nights, stations: 40 };
}
