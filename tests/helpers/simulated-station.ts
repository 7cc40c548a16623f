import {
  answerComparison,
  selectUnits,
  type CallFacts,
  type ComparisonInput,
  type ComparisonResult,
} from '../../shared/comparison/index.ts';
import { comparisonQuestion } from '../../shared/contracts/comparison.ts';
import { ladderQuestion } from '../../shared/contracts/ladder.ts';
import { answerLadder, type LadderInput, type LadderResult } from '../../shared/ladder/index.ts';
import {
  dwellColumns,
  pairSpots,
  STANDING_RULES,
  type HeardOnlyColumns,
  type SpotColumns,
  type UnitColumns,
} from '../../shared/pairing/index.ts';
import { bandOfKhz, type BandMetres } from '../../shared/radio/bands.ts';
import type { Scenario } from '../../worker/fake-feed/scenario.ts';
import { createSimulator, type SimulatedSpot } from '../../worker/fake-feed/simulator.ts';
import { createTruth, type Truth } from '../../worker/fake-feed/truth.ts';

export interface SimulatedQuestion {
  antennaA: string;
  antennaB: string;
  bandMetres: BandMetres;
  /** Sectors of 30 degrees, 0 beginning at north; all round unless given. */
  sectors?: number[];
}

export interface SimulatedAnswer {
  question: SimulatedQuestion;
  answer: ComparisonResult;
  /**
   * The true difference for exactly the evidence that was compared: the antennas' true gains toward each
   * call, averaged over the units, a call counting as often as it made a unit.
   */
  truthDb: number;
  /** The same units, taken as independent and without the receivers' offsets: what not to do. */
  naive: { estimateDb: number; seDb: number };
}

const dayMs = 86_400_000;
const marginDb = 1;

export interface SimulatedLadder {
  answer: LadderResult;
  /**
   * The ladder of the truth: the same units, each with the antennas' true difference toward its call in place
   * of what was heard.
   */
  truth: LadderResult;
}

/** The simulated station's nights, paired as the program pairs them, ready to be asked. */
export function simulateStation(options: { seed: number; scenario: Scenario; nights: number }): {
  spots: number;
  truth: Truth;
  ask(question: SimulatedQuestion): SimulatedAnswer;
  rank(bandMetres: BandMetres, sectors?: number[]): SimulatedLadder;
} {
  const { seed, scenario, nights } = options;
  const simulator = createSimulator({ seed, scenario });
  const truth = createTruth({ seed, scenario });
  const antennas = scenario.antennas.map(({ name }) => name);
  const receivers = scenario.receivers.map(({ callSign }) => callSign);
  const calls = simulator.stations.map(({ call }) => call);
  const callIds = new Map(calls.map((call, id) => [call, id]));
  const facts = new Map<number, CallFacts>(
    simulator.stations.map(({ call, azimuthDeg, distanceKm }, id) => [
      id,
      { call, country: null, azimuthDeg, spreadDeg: 0, distanceKm },
    ]),
  );
  const endMs = simulator.startMs + nights * dayMs;
  const dwells = dwellColumns(
    simulator.dwells(simulator.startMs, endMs).map((dwell) => ({
      receiver: receivers.indexOf(dwell.receiver) + 1,
      antenna: antennas.indexOf(dwell.antenna) + 1,
      startMs: dwell.startMs,
      endMs: dwell.endMs ?? Infinity,
    })),
  );

  const columnsOf = (spots: readonly SimulatedSpot[]): SpotColumns => ({
    timeMs: Float64Array.from(spots, ({ timeMs }) => timeMs),
    receiver: Int32Array.from(spots, ({ receiver }) => receivers.indexOf(receiver) + 1),
    call: Int32Array.from(spots, ({ call }) => callIds.get(call)!),
    band: Int16Array.from(spots, ({ freqKhz }) => bandOfKhz(freqKhz)!),
    freq100Hz: Int32Array.from(spots, ({ freqKhz }) => Math.round(freqKhz * 10)),
    snrDb: Int16Array.from(spots, ({ snrDb }) => snrDb),
    uncertaintySeconds: new Uint8Array(spots.length),
    speedWpm: Uint8Array.from(spots, ({ speedWpm }) => speedWpm),
  });

  let spotCount = 0;
  const units: UnitColumns[] = [];
  const heardOnly: HeardOnlyColumns[] = [];
  for (let night = 0; night < nights; night++) {
    const startMs = simulator.startMs + night * dayMs;
    const spots = [...simulator.spots(startMs, startMs + dayMs)].flat();
    spotCount += spots.length;
    // A night by itself: the few units across noon, when next to nobody is heard, are given up.
    const paired = pairSpots(columnsOf(spots), dwells, STANDING_RULES, { startMs, endMs: startMs + dayMs });
    units.push(paired.units);
    heardOnly.push(paired.heardOnly);
  }
  const unitsOf = byPair(units);
  const heardOnlyOf = byPair(heardOnly);
  const compared = (name: string) => {
    const index = antennas.indexOf(name);
    if (index === -1) throw new RangeError(`the scenario has no antenna "${name}"`);
    const { marker, headingDeg } = scenario.antennas[index]!;
    return { id: index + 1, name, marker, headingDeg };
  };

  return {
    spots: spotCount,
    truth,
    ask(question) {
      const a = compared(question.antennaA);
      const b = compared(question.antennaB);
      const input: ComparisonInput = {
        question: comparisonQuestion.parse({
          antennaA: a.id,
          antennaB: b.id,
          bandsMetres: [question.bandMetres],
          sectors: question.sectors ?? [],
        }),
        antennas: { a, b },
        receivers: receivers.map((callSign, index) => ({ id: index + 1, callSign })),
        rules: { ...STANDING_RULES, blockMinutes: 15 },
        marginDb,
        sectorCount: 12,
        station: scenario.place,
        units: unitsOf(a.id, b.id),
        heardOnly: heardOnlyOf(a.id, b.id),
        calls: facts,
        nights: [],
      };
      const selected = selectUnits(input).units;
      const mix = new Map<string, number>();
      for (let i = 0; i < selected.n; i++) {
        const call = calls[selected.call[i]!]!;
        mix.set(call, (mix.get(call) ?? 0) + 1);
      }
      return {
        question,
        answer: answerComparison(input),
        truthDb: truth.trueDifferenceDb(a.name, b.name, question.bandMetres, { calls: mix }),
        naive: plainMean(selected.differenceDb),
      };
    },
    rank(bandMetres, sectors = []) {
      const everyPair = antennas.flatMap((_, low) =>
        antennas.slice(low + 1).map((__, next) => unitsOf(low + 1, low + next + 2)),
      );
      const all = concatenated(everyPair);
      const input: LadderInput = {
        question: ladderQuestion.parse({ bandMetres, sectors }),
        antennas: antennas.map((name) => ({ ...compared(name), inService: true })),
        receivers: receivers.map((callSign, index) => ({
          ...{ id: index + 1, callSign, label: callSign },
          retired: false,
        })),
        rules: { ...STANDING_RULES, blockMinutes: 15 },
        ...{ marginDb, sectorCount: 12, station: scenario.place, units: all, calls: facts },
      };
      const trueDb = new Map<string, number>();
      const differenceDb = all.differenceDb.map((_, i) => {
        if (all.band[i] !== bandMetres) return 0;
        const [a, b, call] = [all.antennaA[i]!, all.antennaB[i]!, calls[all.call[i]!]!];
        const key = `${a} ${b} ${call}`;
        const known =
          trueDb.get(key) ??
          truth.trueDifferenceDb(antennas[a - 1]!, antennas[b - 1]!, bandMetres, {
            calls: new Map([[call, 1]]),
          });
        trueDb.set(key, known);
        return known;
      });
      return {
        answer: answerLadder(input),
        truth: answerLadder({ ...input, units: { ...all, differenceDb } }),
      };
    },
  };
}

function plainMean(values: Float64Array): { estimateDb: number; seDb: number } {
  const n = values.length;
  const estimateDb = values.reduce((sum, value) => sum + value, 0) / n;
  const squares = values.reduce((sum, value) => sum + (value - estimateDb) ** 2, 0);
  return { estimateDb, seDb: Math.sqrt(squares / (n - 1) / n) };
}

/** The nights' rows of an antenna pair, one after the other, as the server reads them. */
function byPair<T extends UnitColumns | HeardOnlyColumns>(nights: readonly T[]): (a: number, b: number) => T {
  const known = new Map<string, T>();
  const gather = (low: number, high: number): T => {
    const stretches = nights.map((night) => {
      let from = 0;
      const length = night.antennaA.length;
      while (from < length && (night.antennaA[from] !== low || night.antennaB[from] !== high)) from++;
      let to = from;
      while (to < length && night.antennaA[to] === low && night.antennaB[to] === high) to++;
      return { night, from, to };
    });
    return concatenated(stretches.map(({ night, from, to }) => rowsOf(night, from, to)));
  };
  return (a, b) => {
    const [low, high] = [Math.min(a, b), Math.max(a, b)];
    const key = `${low} ${high}`;
    const columns = known.get(key) ?? gather(low, high);
    known.set(key, columns);
    return columns;
  };
}

function rowsOf<T extends UnitColumns | HeardOnlyColumns>(columns: T, from: number, to: number): T {
  const names = Object.keys(columns) as (keyof T)[];
  const cut = names.map((name) => [name, columnOf(columns, name).subarray(from, to)]);
  return Object.fromEntries(cut) as unknown as T;
}

function concatenated<T extends UnitColumns | HeardOnlyColumns>(parts: readonly T[]): T {
  const names = Object.keys(parts[0]!) as (keyof T)[];
  const whole = names.map((name) => [name, joined(parts.map((part) => columnOf(part, name)))]);
  return Object.fromEntries(whole) as unknown as T;
}

function columnOf<T>(columns: T, name: keyof T): Int32Array {
  return columns[name] as Int32Array;
}

/** All columns are typed arrays of one kind each; which one does not matter here. */
function joined(parts: readonly Int32Array[]): Int32Array {
  const Kind = parts[0]!.constructor as new (length: number) => Int32Array;
  const whole = new Kind(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    whole.set(part, at);
    at += part.length;
  }
  return whole;
}
