import { beforeAll, describe, expect, it, vi } from 'vitest';
import { createDemoScenario, demoNights, demoSeed } from '../../worker/fake-feed/scenario.ts';
import { simulateStation, type SimulatedAnswer } from '../helpers/simulated-station.ts';

/**
 * Ground truth: the simulator knows what each antenna really does, so that answers about the demo station
 * can be held against it. Every pair of its eight antennas is asked on every band, all round and toward
 * each side on which many stations live, exactly as the program asks. The truth of a question is the
 * antennas' true gains toward the calls that were compared, as often as they were; it comes from the
 * patterns alone, never from an answer.
 *
 * Intervals of 95 % should hold it 95 times in 100. Two things push the share off that mark: stations that
 * only the better antenna hears make no unit, which pulls toward zero (stations near the threshold, the
 * west most of all); and all round, stations that truly differ by their direction widen the interval,
 * while the truth is that of just these stations. 90 to 99 % are therefore allowed. The study of the
 * estimator without either is in the simulator's own tests.
 */

// Whole seasons are simulated and asked; a busy machine may take its time over them.
vi.setConfig({ testTimeout: 300_000, hookTimeout: 300_000 });

const scenario = createDemoScenario('2026-11-01');
const marginDb = 1;
const allRound: number[] = [];
const towardEasternEurope = [1, 2];
const towardNorthAmerica = [9, 10];

/** All pairs of antennas on all bands, toward each of the sides. */
function askEverything(seed: number, nights: number, sides: readonly number[][]): SimulatedAnswer[] {
  const station = simulateStation({ seed, scenario, nights });
  const names = scenario.antennas.map(({ name }) => name);
  return names.flatMap((antennaA, a) =>
    names
      .slice(a + 1)
      .flatMap((antennaB) =>
        sides.flatMap((sectors) =>
          scenario.bandsMetres.map((bandMetres) => station.ask({ antennaA, antennaB, bandMetres, sectors })),
        ),
      ),
  );
}

const share = (of: readonly SimulatedAnswer[], holds: (answer: SimulatedAnswer) => boolean): number =>
  of.filter(holds).length / of.length;

function holdsTruth({ answer, truthDb }: SimulatedAnswer): boolean {
  const [lo, hi] = answer.estimate!.interval95Db;
  return lo <= truthDb && truthDb <= hi;
}

function describeQuestion({ answer, truthDb, question }: SimulatedAnswer): string {
  return `${JSON.stringify(question)}: ${answer.verdict.sentence} True: ${truthDb.toFixed(2)} dB.`;
}

describe.each([
  {
    label: 'the demo as it is loaded',
    seed: demoSeed,
    nights: demoNights,
    sides: [allRound, towardEasternEurope, towardNorthAmerica],
  },
  {
    label: 'another world after three weeks',
    seed: 2,
    nights: 21,
    sides: [towardEasternEurope, towardNorthAmerica],
  },
])('the truth about the simulated station, $label', ({ seed, nights, sides }) => {
  let answers: SimulatedAnswer[];
  beforeAll(() => {
    answers = askEverything(seed, nights, sides);
  });

  it('can be asked for by far more than 60 questions, and each gets an estimate', () => {
    expect(answers).toHaveLength(sides.length * 28 * 4);
    for (const one of answers) {
      if (one.answer.estimate === null) throw new Error(describeQuestion(one));
    }
  });

  it('lies inside the 95 % interval about 95 % of the time', () => {
    const covered = share(answers, holdsTruth);
    expect(covered).toBeGreaterThanOrEqual(0.9);
    expect(covered).toBeLessThanOrEqual(0.99);
    // Toward the west, where stations are weakest, the pull is largest: no side may fall far below the rest.
    for (const sectors of sides) {
      const there = answers.filter(({ question }) => question.sectors === sectors);
      expect(share(there, holdsTruth)).toBeGreaterThanOrEqual(0.87);
    }
  });

  it('is missed far more often by intervals that take units as independent and receivers as equal', () => {
    const naive = share(answers, ({ truthDb, naive: { estimateDb, seDb } }) => {
      // Hundreds of units: the t distribution's quantile is nearly the normal one.
      return Math.abs(estimateDb - truthDb) <= 1.96 * seDb;
    });
    expect(naive).toBeLessThan(0.8);
    expect(naive).toBeLessThan(share(answers, holdsTruth) - 0.15);
  });

  it('is never on the other side of a verdict of "clearly better", nor far from one of "no difference"', () => {
    const wrong = answers.filter(({ answer, truthDb }) => {
      const { code } = answer.verdict;
      if (code === 'a clearly better') return truthDb <= 0;
      if (code === 'b clearly better') return truthDb >= 0;
      return code === 'no practical difference' && Math.abs(truthDb) > marginDb + 0.25;
    });
    expect(wrong.map(describeQuestion)).toEqual([]);
    // Not for want of verdicts: most of the pairs differ by more than the margin.
    expect(share(answers, ({ answer }) => answer.verdict.code.endsWith('clearly better'))).toBeGreaterThan(
      0.5,
    );
  });

  it('differs from the estimates by a pull toward zero of less than 0.15 dB on the average', () => {
    const pullsDb = answers.map(
      ({ answer, truthDb }) => (answer.estimate!.estimateDb - truthDb) * Math.sign(truthDb),
    );
    const meanDb = pullsDb.reduce((sum, pull) => sum + pull, 0) / pullsDb.length;
    expect(meanDb).toBeGreaterThan(-0.15);
    expect(meanDb).toBeLessThan(0.05);
  });
});
