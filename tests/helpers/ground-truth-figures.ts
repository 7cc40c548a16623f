import type { Experiment, Peek } from './ground-truth-experiment.ts';
import { marginDb } from './ground-truth-experiment.ts';
import type { World } from './ground-truth-world.ts';

/** What should come out; null: nothing is promised, the figure is shown for comparison. */
export interface Goal {
  from: number;
  to: number;
  text: string;
}

/** Something counted or averaged over experiments: 0 or 1, a share, or dB; null: this one has none. */
export interface Figure {
  name: string;
  unit: 'share' | 'dB' | 'dB²';
  goal: Goal | null;
  ours: (experiment: Experiment, world: World) => number | null;
  /** What the number beside ours is; none: there is nothing to set beside it. */
  beside: 'naive' | 'plain' | 'raw' | 'fixed 95 %' | null;
  theirs: (experiment: Experiment, world: World) => number | null;
}

type Interval = readonly [number, number];
type Truth = (experiment: Experiment) => number;

export const coverageGoal: Goal = { from: 0.93, to: 0.97, text: '93 to 97 %' };
export const falseAlarmGoal: Goal = { from: 0, to: 0.05, text: 'at most 5 %' };
export const biasGoal: Goal = { from: -0.2, to: 0.2, text: 'within 0.2 dB' };

const holds = ([lo, hi]: Interval, truth: number): number => (lo <= truth && truth <= hi ? 1 : 0);
const mean = (values: readonly number[]): number | null =>
  values.length === 0 ? null : values.reduce((sum, value) => sum + value, 0) / values.length;

export function coverage(truth: Truth, goal: Goal | null = coverageGoal): Figure {
  return {
    ...{ name: '95 % interval holds the truth', unit: 'share', goal, beside: 'naive' },
    ours: (one) => holds(one.estimate.estimate!.interval95Db, truth(one)),
    theirs: (one) => holds(one.naive.interval95Db, truth(one)),
  };
}

/** A verdict for either antenna counts: 5 % is the chance of both together. */
export function alarm(verdict: 'better' | 'clearly better', most = 0.05): Figure {
  const beyondDb = verdict === 'better' ? 0 : marginDb;
  return {
    name: `verdict “${verdict}”, for A or for B`,
    unit: 'share',
    goal: { from: 0, to: most, text: `at most ${100 * most} %` },
    // "clearly better" includes "better".
    ours: ({ estimate }) => (estimate.verdict.code.endsWith(verdict) ? 1 : 0),
    beside: 'naive',
    theirs: ({ naive }) => (beyond(naive.interval95Db, beyondDb) ? 1 : 0),
  };
}

const beyond = ([lo, hi]: Interval, limitDb: number): boolean => lo > limitDb || hi < -limitDb;

export const equivalenceError: Figure = {
  name: '90 % interval inside the margin',
  unit: 'share',
  goal: falseAlarmGoal,
  ours: ({ estimate }) => {
    const [lo, hi] = estimate.estimate!.interval90Db;
    return lo > -marginDb && hi < marginDb ? 1 : 0;
  },
  beside: 'naive',
  theirs: ({ naive }) => (naive.equivalent ? 1 : 0),
};

/** Trials in which some night's interval left the truth out. */
export function peeks(truth: Truth, promised: boolean): Figure[] {
  const everOut = (pick: (peek: Peek) => Interval | null) => (one: Experiment) =>
    one.peeks().some((peek) => holds(pick(peek) ?? [-Infinity, Infinity], truth(one)) === 0) ? 1 : 0;
  return [
    {
      name: 'peek-proof interval leaves the truth out on some night',
      unit: 'share',
      goal: promised ? falseAlarmGoal : null,
      ours: everOut((peek) => peek.peekProofDb),
      beside: 'fixed 95 %',
      theirs: everOut((peek) => peek.fixedDb),
    },
    {
      name: 'the naive 95 % interval, looked at as often',
      unit: 'share',
      goal: null,
      ours: () => null,
      beside: 'naive',
      theirs: everOut((peek) => peek.naiveDb),
    },
  ];
}

export function rankCoverage(truth: Truth): Figure {
  return {
    name: 'Hodges-Lehmann 95 % interval holds the truth',
    unit: 'share',
    goal: coverageGoal,
    ours: (one) => holds(one.answer().rank!.hodgesLehmannIntervalDb!, truth(one)),
    beside: 'naive',
    theirs: (one) => holds(one.naive.interval95Db, truth(one)),
  };
}

function sectorsThatSpeak(one: Experiment, world: World) {
  return one
    .sectors()
    .filter((cell) => cell.speaks && cell.pooledDb !== null)
    .map((cell) => ({ ...cell, truthDb: world.sectorDifferencesDb![cell.sector!]! }));
}

/** Sectors as they are and drawn toward their mean, over the sectors that speak. */
export const cells: readonly Figure[] = [
  {
    ...{ name: 'pooled sector’s 95 % interval holds its truth', unit: 'share', goal: coverageGoal },
    ours: (one, world) =>
      mean(sectorsThatSpeak(one, world).map((cell) => holds(cell.pooledIntervalDb!, cell.truthDb))),
    beside: 'raw',
    theirs: (one, world) =>
      mean(sectorsThatSpeak(one, world).map((cell) => holds(cell.intervalDb!, cell.truthDb))),
  },
  {
    ...{ name: 'squared error of a sector', unit: 'dB²', goal: null },
    ours: (one, world) =>
      mean(sectorsThatSpeak(one, world).map((cell) => (cell.pooledDb! - cell.truthDb) ** 2)),
    beside: 'raw',
    theirs: (one, world) =>
      mean(sectorsThatSpeak(one, world).map((cell) => (cell.estimateDb! - cell.truthDb) ** 2)),
  },
];

/** All pairs of antennas; `gainsDb` by antenna id less one. */
export function ladderCoverage(gainsDb: readonly number[]): Figure {
  const share = (of: (one: Experiment) => ReturnType<Experiment['ladder']>['ours']) => (one: Experiment) =>
    mean(of(one).pairs.map(({ a, b, interval }) => holds(interval!, gainsDb[a - 1]! - gainsDb[b - 1]!)));
  return {
    ...{ name: 'pair’s 95 % interval holds its truth, all pairs', unit: 'share', goal: coverageGoal },
    ours: share((one) => one.ladder().ours),
    beside: 'naive',
    theirs: share((one) => one.ladder().naive),
  };
}

/** The censored estimate beside the plain one, which takes only stations heard on both. */
export function biasOf(truth: Truth, promised: boolean): Figure[] {
  return [
    {
      ...{ name: 'censored estimate’s bias', unit: 'dB', goal: promised ? biasGoal : null, beside: 'plain' },
      ours: (one) => {
        const { view } = one.censored();
        return view && view.estimateDb - truth(one);
      },
      theirs: (one) => one.estimate.estimate!.estimateDb - truth(one),
    },
    {
      ...{ name: 'censored 95 % interval holds the truth', unit: 'share', goal: null, beside: 'plain' },
      ours: (one) => {
        const { view } = one.censored();
        return view && holds(view.intervalDb, truth(one));
      },
      theirs: (one) => holds(one.estimate.estimate!.interval95Db, truth(one)),
    },
  ];
}
