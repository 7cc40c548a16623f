import { beforeAll, describe, expect, it, vi } from 'vitest';
import { createDemoScenario, demoNights, demoSeed } from '../../worker/fake-feed/scenario.ts';
import { simulateStation, type SimulatedAnswer } from '../helpers/simulated-station.ts';

/**
 * Ground truth: the simulator knows what each antenna really does, so that the answers about the demo
 * station can be held against it. Every pair of its eight antennas is asked on every band, exactly as the
 * program does. Nothing here is tuned to the answers: the truth of a question is the antennas' true gains
 * toward the calls that were compared, and the truth is drawn from patterns alone.
 *
 * Intervals of 95 % should hold it 95 times in 100. A both-heard comparison also carries a small pull
 * toward zero (stations that only the better antenna hears make no unit), so that 90 to 99 % are allowed.
 */

// Whole seasons are simulated and asked; a busy machine may take its time over them.
vi.setConfig({ testTimeout: 300_000, hookTimeout: 300_000 });

const scenario = createDemoScenario('2026-11-01');

/** All pairs of antennas on all bands. */
function askEverything(seed: number, nights: number): SimulatedAnswer[] {
  const station = simulateStation({ seed, scenario, nights });
  const names = scenario.antennas.map(({ name }) => name);
  return names.flatMap((antennaA, a) =>
    names
      .slice(a + 1)
      .flatMap((antennaB) =>
        scenario.bandsMetres.map((bandMetres) => station.ask({ antennaA, antennaB, bandMetres })),
      ),
  );
}

const share = (of: readonly SimulatedAnswer[], holds: (answer: SimulatedAnswer) => boolean): number =>
  of.filter(holds).length / of.length;

function holdsTruth({ answer, truthDb }: SimulatedAnswer): boolean {
  const [lo, hi] = answer.estimate!.interval95Db;
  return lo <= truthDb && truthDb <= hi;
}

describe.each([
  { label: 'the demo as it is loaded', seed: demoSeed, nights: demoNights },
  { label: 'another world, asked after twelve nights', seed: 20261101, nights: 12 },
])('the truth of the simulated station: $label', ({ seed, nights }) => {
  let answers: SimulatedAnswer[];
  beforeAll(() => {
    answers = askEverything(seed, nights);
  });

  it('is asked for by at least 60 questions, all of which get an estimate', () => {
    expect(answers.length).toBeGreaterThanOrEqual(60);
    for (const { answer, question } of answers) {
      if (answer.estimate === null) throw new Error(`no estimate for ${JSON.stringify(question)}`);
    }
  });

  it('lies inside the 95 % interval about 95 % of the time', () => {
    const covered = share(answers, holdsTruth);
    console.log(`coverage, seed ${seed}, ${nights} nights: ${(100 * covered).toFixed(1)} % of ${answers.length}`);
    expect(covered).toBeGreaterThanOrEqual(0.9);
    expect(covered).toBeLessThanOrEqual(0.99);
  });

  it('is missed far more often by intervals that take units as independent and receivers as equal', () => {
    const naive = share(answers, ({ truthDb, naive: { estimateDb, seDb } }) => {
      // Thousands of units: the t distribution's quantile is the normal one.
      return Math.abs(estimateDb - truthDb) <= 1.96 * seDb;
    });
    console.log(`naive coverage, seed ${seed}, ${nights} nights: ${(100 * naive).toFixed(1)} %`);
    expect(naive).toBeLessThan(0.85);
    expect(naive).toBeLessThan(share(answers, holdsTruth) - 0.1);
  });

  it('never contradicts a verdict of "better", clearly or not', () => {
    for (const { answer, truthDb, question } of answers) {
      const { code } = answer.verdict;
      const wrong =
        (code.startsWith('a ') && truthDb < -0.5) ||
        (code.startsWith('b ') && truthDb > 0.5) ||
        (code === 'a clearly better' && truthDb <= 0) ||
        (code === 'b clearly better' && truthDb >= 0);
      if (wrong) throw new Error(`"${code}" against ${truthDb.toFixed(2)} dB: ${JSON.stringify(question)}`);
    }
    // Not for want of verdicts: most of the pairs differ by more than the margin.
    expect(share(answers, ({ answer }) => answer.verdict.code.endsWith('clearly better'))).toBeGreaterThan(0.5);
  });

  it('is pulled toward zero by less than 0.15 dB on the average', () => {
    const pullsDb = answers.map(
      ({ answer, truthDb }) => (answer.estimate!.estimateDb - truthDb) * Math.sign(truthDb),
    );
    const meanDb = pullsDb.reduce((sum, pull) => sum + pull, 0) / pullsDb.length;
    expect(meanDb).toBeGreaterThan(-0.15);
    expect(meanDb).toBeLessThan(0.05);
  });
});
