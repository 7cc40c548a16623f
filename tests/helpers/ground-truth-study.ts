import { createRandom } from '../../shared/stats/index.ts';
import { runExperiment } from './ground-truth-experiment.ts';
import type { Figure } from './ground-truth-figures.ts';
import type { Scenario } from './ground-truth-scenarios.ts';

/** A figure over all experiments that had it. */
export interface Measured {
  value: number;
  /** Monte-Carlo standard error: of a share sqrt(p (1 - p) / n), otherwise sd / sqrt(n). */
  error: number;
  n: number;
}

export interface StudyRow {
  scenario: Scenario;
  figure: Figure;
  experiments: number;
  /** Null where no experiment had the figure. */
  ours: Measured | null;
  theirs: Measured | null;
}

/** The scenario lived through `experiments` times. The same seed gives the same rows. */
export function study(scenario: Scenario, experiments: number, seed: number): StudyRow[] {
  const random = createRandom(seed).fork(scenario.key);
  const values = scenario.figures.map(() => ({ ours: [] as number[], theirs: [] as number[] }));
  for (let e = 0; e < experiments; e++) {
    const own = random.fork(e);
    const world = scenario.world(own.fork('world'));
    const experiment = runExperiment(world, own, scenario.question);
    scenario.figures.forEach((figure, k) => {
      const [ours, theirs] = [figure.ours(experiment, world), figure.theirs(experiment, world)];
      if (ours !== null) values[k]!.ours.push(ours);
      if (theirs !== null) values[k]!.theirs.push(theirs);
    });
  }
  return scenario.figures.map((figure, k) => ({
    ...{ scenario, figure, experiments },
    ours: measure(values[k]!.ours),
    theirs: measure(values[k]!.theirs),
  }));
}

function measure(values: readonly number[]): Measured | null {
  const n = values.length;
  if (n === 0) return null;
  const value = values.reduce((sum, one) => sum + one, 0) / n;
  // Of zeros and ones this is p (1 - p).
  const variance = values.reduce((sum, one) => sum + (one - value) ** 2, 0) / n;
  return { value, error: Math.sqrt(variance / n), n };
}
