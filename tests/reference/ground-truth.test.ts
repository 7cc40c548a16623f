import { describe, expect, it, vi } from 'vitest';
import { createRandom } from '../../shared/stats/index.ts';
import { runExperiment } from '../helpers/ground-truth-experiment.ts';
import { liveThrough, type World } from '../helpers/ground-truth-world.ts';
import { ordinary, scenarios } from '../helpers/ground-truth-scenarios.ts';
import { study, type StudyRow } from '../helpers/ground-truth-study.ts';

/**
 * The ground-truth study (docs/ground-truth.md) with fewer experiments: the truth is what was put into a
 * simulated world, never an answer. Goals: 95 % intervals hold the truth in 93 to 97 %; verdicts without a
 * difference, equivalence at the margin and the peek-proof interval looked at every night are wrong in at
 * most 5 %; the censored estimate is off by less than 0.2 dB where the plain one is by more than 0.5 dB.
 *
 * So few experiments cannot tell 92 from 94 %: each goal is widened by three Monte-Carlo standard errors
 * for the number of experiments run. What the naive method does lies beyond even that: regression without
 * clusters would fail here.
 */

// A busy machine may take its time over hundreds of experiments.
vi.setConfig({ testTimeout: 300_000 });

const seed = 7;

function run(key: string, experiments: number): StudyRow[] {
  return study(
    scenarios.find((scenario) => scenario.key === key)!,
    experiments,
    seed,
  );
}

/** Three standard errors of a share that truly is `share`. */
const slack = (share: number, experiments: number): number =>
  3 * Math.sqrt((share * (1 - share)) / experiments);

function expectCoverage(row: StudyRow, experiments = row.experiments): void {
  const lowest = 0.93 - slack(0.93, experiments);
  const { ours, theirs } = row;
  expect(ours!.n).toBe(row.experiments);
  expect(ours!.value, row.figure.name).toBeGreaterThanOrEqual(lowest);
  expect(ours!.value, row.figure.name).toBeLessThanOrEqual(0.97 + slack(0.97, experiments));
  expect(theirs!.value, `naive: ${row.figure.name}`).toBeLessThan(lowest);
}

function expectFewErrors(row: StudyRow): void {
  const most = 0.05 + slack(0.05, row.experiments);
  expect(row.ours!.value, row.figure.name).toBeLessThanOrEqual(most);
  expect(row.theirs!.value, `${row.figure.beside}: ${row.figure.name}`).toBeGreaterThan(most);
}

describe('the world of the ground-truth study', () => {
  const still: World = {
    ...ordinary,
    gainsDb: [3, 0],
    plan: 'swap-unequal',
    fading: {
      ...{ sharedSlowDb: 2, sharedFastDb: 0, nightDeviationDb: 0, unsharedSlowDb: 0 },
      ...{ unsharedFastDb: 0, unsteadiness: null, measurementDb: 0 },
    },
    threshold: { atDb: -100, softnessDb: 0, missedShare: 0 },
  };

  it('is the same for the same seed and another for another', () => {
    const snrs = (from: number) => [...liveThrough(ordinary, createRandom(from)).spots.snrDb];
    expect(snrs(3)).toEqual(snrs(3));
    expect(snrs(3)).not.toEqual(snrs(4));
  });

  it('without fading or misses makes units of exactly the difference put in', () => {
    const { estimate, naive } = runExperiment({ ...still, offsetsDb: [1, 1] }, createRandom(5));
    expect(estimate.counts.units).toBeGreaterThan(500);
    // Whole decibels: rounding takes the same from both sides.
    expect(naive.estimateDb).toBeCloseTo(3, 9);
    expect(naive.seDb).toBeCloseTo(0, 9);
  });

  it('with receivers 3 dB apart and exchanged unevenly adds a third of that to the plain mean only', () => {
    const fading = { ...still.fading, measurementDb: 0.5 };
    const { estimate, naive } = runExperiment({ ...still, fading, offsetsDb: [2, -1] }, createRandom(5));
    expect(Math.abs(estimate.estimate!.estimateDb - 3)).toBeLessThan(0.1);
    expect(Math.abs(naive.estimateDb - 4)).toBeLessThan(0.3);
  });
});

describe('ground truth', () => {
  it('is held by 95 % intervals, and no better antenna is found where there is none', () => {
    const [holds, better] = run('no-difference', 200);
    expectCoverage(holds!);
    expectFewErrors(better!);
  });

  it('is held where the receivers were exchanged unevenly, which the naive method takes for a difference', () => {
    const [holds, better] = run('uneven', 120);
    expectCoverage(holds!);
    expectFewErrors(better!);
    expect(better!.theirs!.value).toBeGreaterThan(0.9);
  });

  it('is seldom called practically equal at a difference of exactly the margin', () => {
    const [equal, clearly] = run('margin', 150);
    expectFewErrors(equal!);
    expect(clearly!.ours!.value).toBeLessThanOrEqual(0.025 + slack(0.025, 150));
  });

  it('stays in the peek-proof interval on every night, where the fixed interval loses it far more often', () => {
    const [peekProof, naive] = run('peeking', 80);
    expectFewErrors(peekProof!);
    expect(naive!.theirs!.value).toBeGreaterThan(peekProof!.theirs!.value);
  });

  it('is held by two-way intervals where nights truly differ', () => {
    expectCoverage(run('nights-two-way', 80)[0]!);
  });

  it('is met by the censored estimate where the stations heard on both alone mislead', () => {
    for (const key of ['censored-model', 'censored']) {
      const [bias] = run(key, 40);
      expect(Math.abs(bias!.ours!.value), key).toBeLessThan(0.2 + 3 * bias!.ours!.error);
      expect(bias!.theirs!.value, key).toBeLessThan(-0.5);
    }
  });

  it('is held by the ladder for pairs of five antennas on three receivers', () => {
    // Ten pairs of an experiment share its data: as if there were no more than the experiments.
    expectCoverage(run('ladder', 40)[0]!);
  });
});
