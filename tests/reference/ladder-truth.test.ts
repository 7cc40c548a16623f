import { beforeAll, describe, expect, it, vi } from 'vitest';
import { createDemoScenario, demoNights, demoSeed } from '../../worker/fake-feed/scenario.ts';
import { simulateStation, type SimulatedLadder } from '../helpers/simulated-station.ts';

/**
 * Ground truth of the ladder: the simulator knows what each antenna really does. The truth of a ladder is
 * the ladder of the antennas' true gains toward the very calls that were heard, in the very same units; it
 * comes from the patterns alone.
 *
 * Stations that only the better antenna hears make no unit, which shortens large differences (the west
 * most of all, where antennas differ by ten decibels and more and stations are weak). So the intervals are
 * asked to hold the truth as they are all round, and toward one side up to a twentieth of the difference.
 * The study of the estimator without that pull stands in shared/stats/ladder.test.ts.
 */
vi.setConfig({ testTimeout: 300_000, hookTimeout: 300_000 });

const scenario = createDemoScenario('2026-11-01');
const allRound: number[] = [];
const towardEasternEurope = [1, 2];
const towardNorthAmerica = [9, 10];

describe('the ladder of the simulated station', () => {
  let ladders: SimulatedLadder[];
  beforeAll(() => {
    const station = simulateStation({ seed: demoSeed, scenario, nights: demoNights });
    ladders = [allRound, towardEasternEurope, towardNorthAmerica].flatMap((sectors) =>
      scenario.bandsMetres.map((band) => station.rank(band, sectors)),
    );
  });

  it('puts all eight antennas on one scale, and each speaks', () => {
    for (const { answer } of ladders) {
      expect(
        answer.components.map(({ antennas }) => antennas.length),
        answer.sentence,
      ).toEqual([8]);
      expect(answer.components[0]!.antennas.filter(({ speaks }) => !speaks)).toEqual([]);
      expect(answer.obstacles).toEqual([]);
    }
  });

  /** True and estimated difference of each pair, with its interval. */
  const differences = (of: readonly SimulatedLadder[]) =>
    of.flatMap(({ answer, truth }) => {
      const trueDb = new Map(truth.components[0]!.antennas.map(({ id, valueDb }) => [id, valueDb!]));
      return answer.components[0]!.pairs.map(({ a, b, differenceDb, intervalDb }) => ({
        trueDb: trueDb.get(a)! - trueDb.get(b)!,
        differenceDb,
        lo: intervalDb![0],
        hi: intervalDb![1],
      }));
    });
  const covered = (pairs: ReturnType<typeof differences>, pull: number) =>
    pairs.filter(({ trueDb, lo, hi }) => {
      const slack = pull * Math.abs(trueDb);
      return lo - slack <= trueDb && trueDb <= hi + slack;
    }).length / pairs.length;

  it('holds the true differences of all pairs in its intervals', () => {
    const around = differences(ladders.slice(0, 4));
    const sided = differences(ladders.slice(4));
    expect([around.length, sided.length]).toEqual([4 * 28, 2 * 4 * 28]);
    expect(covered(around, 0)).toBeGreaterThanOrEqual(0.93);
    expect(covered(sided, 0)).toBeGreaterThanOrEqual(0.8);
    expect(covered(sided, 0.05)).toBeGreaterThanOrEqual(0.95);
  });

  it('shortens large differences by a twentieth at the most, and stretches none', () => {
    for (const one of ladders) {
      const pairs = differences([one]);
      const slope =
        pairs.reduce((sum, pair) => sum + pair.trueDb * pair.differenceDb, 0) /
        pairs.reduce((sum, pair) => sum + pair.trueDb ** 2, 0);
      expect(slope, one.answer.sentence).toBeGreaterThan(0.94);
      expect(slope, one.answer.sentence).toBeLessThan(1.02);
    }
  });

  it('names an antenna best that truly is, or is within the margin of the best', () => {
    for (const { answer, truth } of ladders) {
      const best = answer.components[0]!.antennas[0]!;
      const trueValues = truth.components[0]!.antennas;
      const short = trueValues[0]!.valueDb! - trueValues.find(({ id }) => id === best.id)!.valueDb!;
      // Two antennas a tenth apart may change places; nobody may be sent to a bad one.
      expect(short, answer.sentence).toBeLessThan(answer.marginDb);
      if (best.chanceBest! > 0.99) expect(short, answer.sentence).toBeLessThan(0.5);
    }
  });
});
