import { describe, expect, it, vi } from 'vitest';
import {
  dwellColumns,
  pairSpots,
  spotColumns,
  STANDING_RULES,
  type SpotRow,
  type UnitRow,
  unitRowsOf,
} from '../../shared/pairing/index.ts';
import { bandOfKhz } from '../../shared/radio/bands.ts';
import { nightIndexOf } from '../../shared/radio/night.ts';
import { clusterIds, clusterRegression } from '../../shared/stats/index.ts';
import { createDemoScenario } from './scenario.ts';
import { createSimulator } from './simulator.ts';
import { createTruth } from './truth.ts';

// Whole nights are simulated; a busy machine may take its time over them.
vi.setConfig({ testTimeout: 60_000 });

const scenario = createDemoScenario('2026-11-01');
const seed = 2026;
const nights = 4;
const dayMs = 86_400_000;
const antennas = scenario.antennas.map(({ name }) => name);
const receivers = scenario.receivers.map(({ callSign }) => callSign);

interface Answer {
  truthDb: number;
  estimateDb: number;
  standardErrorDb: number;
}

/** Asks every antenna pair and band of some simulated nights as the program does, beside the truth. */
function askAll(study: boolean): Answer[] {
  const simulator = createSimulator({ seed, scenario, study });
  const truth = createTruth({ seed, scenario, study });
  const fromMs = simulator.startMs + 7 * dayMs;
  const toMs = fromMs + nights * dayMs;
  const calls = simulator.stations.map(({ call }) => call);
  const callNumbers = new Map(calls.map((call, index) => [call, index]));
  const rows: SpotRow[] = [];
  for (const batch of simulator.spots(fromMs, toMs)) {
    for (const spot of batch) {
      rows.push({
        timeMs: spot.timeMs,
        receiver: receivers.indexOf(spot.receiver) + 1,
        call: callNumbers.get(spot.call)!,
        band: bandOfKhz(spot.freqKhz)!,
        freq100Hz: Math.round(spot.freqKhz * 10),
        snrDb: spot.snrDb,
      });
    }
  }
  const dwells = simulator.dwells(simulator.startMs, toMs).map((dwell) => ({
    receiver: receivers.indexOf(dwell.receiver) + 1,
    antenna: antennas.indexOf(dwell.antenna) + 1,
    startMs: dwell.startMs,
    endMs: dwell.endMs ?? Infinity,
  }));
  const blockMs = STANDING_RULES.blockMinutes * 60_000;
  const window = {
    startMs: Math.ceil(fromMs / blockMs) * blockMs,
    endMs: Math.floor(toMs / blockMs) * blockMs,
  };
  const { units } = pairSpots(spotColumns(rows), dwellColumns(dwells), STANDING_RULES, window);
  const questions = new Map<string, UnitRow[]>();
  for (const unit of unitRowsOf(units)) {
    // Two receivers on one antenna say nothing about antennas.
    if (unit.antennaA === unit.antennaB) continue;
    const key = `${unit.antennaA} ${unit.antennaB} ${unit.band}`;
    const known = questions.get(key);
    if (known) known.push(unit);
    else questions.set(key, [unit]);
  }
  return [...questions.values()]
    .filter((list) => list.length >= 100)
    .map((list) => {
      const { antennaA, antennaB, band } = list[0]!;
      const sides = [2, 3].map((receiver) =>
        list.map((unit) => Number(unit.receiverA === receiver) - Number(unit.receiverB === receiver)),
      );
      const { ids } = clusterIds(
        list.map(
          (unit) => `${unit.call} ${nightIndexOf(unit.blockMinute * 60_000, scenario.place.longitude)}`,
        ),
      );
      const fit = clusterRegression(
        { columns: [list.map(() => 1), ...sides] },
        list.map(({ differenceDb }) => differenceDb),
        ids,
      );
      const mix = new Map<string, number>();
      for (const { call } of list) mix.set(calls[call]!, (mix.get(calls[call]!) ?? 0) + 1);
      const { estimate, se } = fit.coefficients[0]!;
      if (estimate === null || se === null)
        throw new Error(`antennas ${antennaA} and ${antennaB} not separable`);
      return {
        truthDb: truth.trueDifferenceDb(antennas[antennaA - 1]!, antennas[antennaB - 1]!, band, {
          calls: mix,
        }),
        estimateDb: estimate,
        standardErrorDb: se,
      };
    });
}

describe('the truth behind the simulator', () => {
  const demo = createTruth({ seed, scenario });
  const study = createTruth({ seed, scenario, study: true });

  it('is what comparisons of the ideal study find, without bias', () => {
    const answers = askAll(true);
    expect(answers.length).toBeGreaterThanOrEqual(100);
    const scores = answers.map((a) => (a.estimateDb - a.truthDb) / a.standardErrorDb);
    // A standard normal number passes 4.5 once in 150,000 draws.
    for (const score of scores) expect(Math.abs(score)).toBeLessThan(4.5);
    const meanErrorDb = answers.reduce((sum, a) => sum + a.estimateDb - a.truthDb, 0) / answers.length;
    expect(Math.abs(meanErrorDb)).toBeLessThan(0.1);
  });

  it('is found in the demo too but for a few per cent, by which the loss of weak stations pulls toward zero', () => {
    const clear = askAll(false).filter(({ truthDb }) => Math.abs(truthDb) > 1.5);
    expect(clear.length).toBeGreaterThanOrEqual(30);
    const found = clear.reduce((sum, a) => sum + a.estimateDb * Math.sign(a.truthDb), 0);
    const real = clear.reduce((sum, a) => sum + Math.abs(a.truthDb), 0);
    expect(found / real).toBeGreaterThan(0.94);
    expect(found / real).toBeLessThan(1.02);
  });

  it('has one difference a band in the ideal study, whoever is heard from wherever', () => {
    const everywhere = study.trueDifferenceDb('North-east wire', 'Vertical', 160);
    for (const azimuthDeg of [0, 55, 190, 300]) {
      expect(study.trueDifferenceDb('North-east wire', 'Vertical', 160, { azimuthDeg })).toBeCloseTo(
        everywhere,
        9,
      );
    }
  });

  it('follows the heading in the demo', () => {
    const toward = demo.trueDifferenceDb('North-east wire', 'Vertical', 80, { azimuthDeg: 55 });
    const behind = demo.trueDifferenceDb('North-east wire', 'Vertical', 80, { azimuthDeg: 235 });
    expect(toward - behind).toBeGreaterThan(8);
  });

  it('turns its sign when the antennas change places', () => {
    expect(demo.trueDifferenceDb('West wire', 'South wire', 40)).toBeCloseTo(
      -demo.trueDifferenceDb('South wire', 'West wire', 40),
      12,
    );
  });

  it('weighs a mix of stations by its counts', () => {
    const stations = createSimulator({ seed, scenario }).stations;
    const [one, other] = [stations[0]!, stations.at(-1)!];
    const differenceDb = (azimuthDeg: number): number =>
      demo.trueDifferenceDb('West wire', 'Vertical', 80, { azimuthDeg });
    const calls = new Map([
      [one.call, 3],
      [other.call, 1],
    ]);
    expect(demo.trueDifferenceDb('West wire', 'Vertical', 80, { calls })).toBeCloseTo(
      0.75 * differenceDb(one.azimuthDeg) + 0.25 * differenceDb(other.azimuthDeg),
      9,
    );
  });

  it('names what it does not know', () => {
    expect(() => demo.trueGainDb('Fence', 80, 0)).toThrow('"Fence"');
    expect(() => demo.receiverOffsetDb('EI7QSZ', 80)).toThrow('EI7QSZ');
    expect(() =>
      demo.trueDifferenceDb('Vertical', 'West wire', 80, { calls: new Map([['EI7QSB', 1]]) }),
    ).toThrow('EI7QSB');
  });
});
