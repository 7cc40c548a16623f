import { nightIndexOf, nightIndexOfDate, nightStartMs } from '../../shared/radio/night.ts';
import { createRandom, type Random } from '../../shared/stats/random.ts';
import { createActivity, levelAt, type Run } from './activity.ts';
import { antennaFadingDb, commonFadingDb, demoFading, studyFading } from './fading.ts';
import { noiseKey, normalAt, uniformAt } from './hash-noise.ts';
import {
  antennaGainDb,
  checkHiddenValues,
  demoHiddenValues,
  withoutDirections,
  type HiddenValues,
} from './hidden-values.ts';
import type { Scenario } from './scenario.ts';
import { createStationPopulation, type SimulatedStation } from './station-population.ts';
import { createSwitchingPlan, type PlannedDwell } from './switching-plan.ts';

/** One report of one receiver, as a skimmer would send it. */
export interface SimulatedSpot {
  timeMs: number;
  /** Call sign of the receiver. */
  receiver: string;
  call: string;
  freqKhz: number;
  mode: 'CW';
  snrDb: number;
  speedWpm: number;
  kind: 'CQ' | 'DX';
}

/** Which antenna a receiver is truly on at a moment; null: it hears nothing. */
export type AntennaLookup = (receiver: string, timeMs: number) => string | null;

export interface SimulatorOptions {
  seed: number;
  scenario: Scenario;
  hidden?: HiddenValues;
  /**
   * The ideal study: every antenna has one gain a band whatever the direction, and every station is far
   * above the decode threshold, so that nothing is selected by strength and the true difference of two
   * antennas is one number. Without it only stations strong enough on BOTH antennas make units: where the
   * weaker antenna is near the threshold, its lucky fades are kept and its others never seen. That pulls
   * a both-heard comparison toward zero, in the demo by some 2 to 4 % of the difference: real stations
   * have the same bias, the larger the weaker they hear, and the censored view is the answer to it.
   */
  study?: boolean;
}

export interface LiveOptions {
  /** Wall clock time at which the live feed begins. */
  fromMs: number;
  /**
   * How many minutes of radio pass in a minute of the wall clock (1 unless given): a busier feed. Spots
   * and the switch keep wall clock time.
   */
  speed?: number;
  /** The switch, when somebody else works it; the simulator's own plan otherwise. */
  antennaAt?: AntennaLookup;
}

export interface LiveFeed {
  /** The spots since the last call up to (not including) `nowMs`, in time order. */
  advance(nowMs: number): SimulatedSpot[];
}

export interface Simulator {
  stations: readonly SimulatedStation[];
  /** First moment of the first night. */
  startMs: number;
  antennaAt: AntennaLookup;
  /** The switch log: dwells that start in [fromMs, toMs), in time order. */
  dwells(fromMs: number, toMs: number): PlannedDwell[];
  /** Spots of [fromMs, toMs) in time order, in batches of some minutes. */
  spots(fromMs: number, toMs: number): Generator<SimulatedSpot[]>;
  live(options: LiveOptions): LiveFeed;
}

const batchMs = 10 * 60_000;
/** The longest that a receiver takes from hearing a call to reporting it. */
const longestDelayMs = 5_000;
/** A receiver decodes half of the calls at this level, dB. */
const thresholdDb = 4;
const missedChance = 0.06;
/** A call is measured while it is sent, some seconds before the report: why a switch needs a guard. */
const shortestDecodeMs = 3_000;
const longestDecodeMs = 12_000;
const studyLevelDb = 32;

interface ActiveRun {
  run: Run;
  random: Random;
  nextMs: number;
  freqKhz: number;
  over: number;
}

interface TimedSpot {
  spot: SimulatedSpot;
  /** Time of the report on the radio's clock, which runs faster than the wall's in a sped-up feed. */
  radioMs: number;
}

/**
 * A seeded model of a station's nights. The same seed and scenario give the same spots for a range of
 * time, whether it is asked for whole, in parts, or lived through.
 *
 * @throws RangeError when the scenario names an antenna or receiver without hidden values
 */
export function createSimulator(options: SimulatorOptions): Simulator {
  const { seed, scenario, study = false } = options;
  const given = options.hidden ?? demoHiddenValues;
  checkHiddenValues(given, scenario);
  const hidden = study ? withoutDirections(given) : given;
  const home = scenario.place;
  const stations = createStationPopulation(seed, home, scenario.bandsMetres);
  const plan = createSwitchingPlan(seed, scenario);
  const makeRuns = createActivity({
    seed,
    home,
    bands: scenario.bandsMetres,
    stations,
    ...(study ? { fixedLevelDb: studyLevelDb } : {}),
  });
  const depth = study ? studyFading : demoFading;
  const startMs = nightStartMs(nightIndexOfDate(scenario.firstNight), home.longitude);
  const overs = createRandom(seed).fork('overs');
  const receivers = scenario.receivers.map(({ callSign }, index) => ({ callSign, index }));
  const antennaIndex = new Map(scenario.antennas.map(({ name }, index) => [name, index]));

  /** What an antenna makes of a run's signal at a moment, before the receiver: dB over noise. */
  const signalDb = (run: Run, antenna: string, timeMs: number, commonDb: number): number => {
    const index = antennaIndex.get(antenna);
    if (index === undefined) throw new RangeError(`the simulator knows no antenna "${antenna}"`);
    return (
      commonDb +
      antennaGainDb(hidden, antenna, run.bandMetres, run.station.azimuthDeg) +
      antennaFadingDb(depth, run.pathKey, index, run.nightIndex, timeMs)
    );
  };

  const begin = (run: Run): ActiveRun => {
    const random = overs.fork(run.nightIndex).fork(run.number);
    return {
      run,
      random,
      nextMs: run.startMs + Math.round(40_000 * random.uniform()),
      freqKhz: run.freqKhz,
      over: 0,
    };
  };

  /** One call and what the receivers make of it; leaves the time of the next call behind. */
  const call = (
    active: ActiveRun,
    wallMs: (radioMs: number) => number,
    antennaAt: AntennaLookup,
    out: TimedSpot[],
  ): void => {
    const { run, random, nextMs: heardMs } = active;
    // All draws that shape the run come first and always: what was heard must not change what is sent.
    const gapMs = Math.round((60 + 110 * random.uniform()) * 1000);
    const moves = random.uniform() < 0.02;
    const moveKhz = (random.integer(31) - 15) / 10;
    const speedWpm = run.speedWpm + random.integer(3) - 1;
    const kind = random.uniform() < 0.95 ? 'CQ' : 'DX';
    const key = noiseKey(seed, run.nightIndex, run.number, active.over);
    for (const { callSign, index } of receivers) {
      const receiverKey = noiseKey(key, index);
      const delayMs = Math.floor(longestDelayMs * uniformAt(receiverKey, 1));
      const decodeMs =
        shortestDecodeMs + Math.floor((longestDecodeMs - shortestDecodeMs) * uniformAt(receiverKey, 2));
      const radioMs = heardMs + delayMs;
      const timeMs = wallMs(radioMs);
      const antenna = antennaAt(callSign, timeMs - decodeMs);
      if (antenna === null || uniformAt(receiverKey, 3) < missedChance) continue;
      const measuredMs = radioMs - decodeMs;
      const commonDb = levelAt(run, measuredMs) + commonFadingDb(depth, run.pathKey, measuredMs);
      const levelDb =
        signalDb(run, antenna, measuredMs, commonDb) +
        hidden.offsetsDb[callSign]![run.bandMetres]! +
        depth.measurementDb * normalAt(receiverKey, 4);
      if (uniformAt(receiverKey, 5) > 1 / (1 + Math.exp(1.5 * (thresholdDb - levelDb)))) continue;
      const driftKhz = uniformAt(receiverKey, 6) < 0.25 ? (uniformAt(receiverKey, 7) < 0.5 ? -0.1 : 0.1) : 0;
      out.push({
        radioMs,
        spot: {
          timeMs,
          receiver: callSign,
          call: run.station.call,
          freqKhz: Math.round((active.freqKhz + driftKhz) * 10) / 10,
          mode: 'CW',
          snrDb: Math.max(0, Math.min(60, Math.round(levelDb))),
          speedWpm,
          kind,
        },
      });
    }
    active.over++;
    // A caller who moves calls again at once, and is reported again at once.
    active.nextMs = heardMs + (moves ? 15_000 : gapMs);
    if (moves) active.freqKhz = Math.round((active.freqKhz + moveKhz) * 10) / 10;
  };

  /** Walks through time; the only place where spots are made. */
  const createCursor = (
    fromMs: number,
    wallMs: (radioMs: number) => number,
    antennaAt: AntennaLookup,
  ): ((toMs: number) => SimulatedSpot[]) => {
    // Calls of the last seconds before the range may be reported inside it.
    let nightIndex = nightIndexOf(fromMs - longestDelayMs, home.longitude);
    let waiting = makeRuns(nightIndex).filter((run) => run.endMs > fromMs - longestDelayMs);
    let next = 0;
    let active: ActiveRun[] = [];
    let pending: TimedSpot[] = [];
    let doneMs = fromMs;

    const workThrough = (toMs: number): void => {
      for (; next < waiting.length && waiting[next]!.startMs < toMs; next++)
        active.push(begin(waiting[next]!));
      for (const one of active) {
        const untilMs = Math.min(toMs, one.run.endMs);
        while (one.nextMs < untilMs) call(one, wallMs, antennaAt, pending);
      }
      active = active.filter((one) => one.nextMs < one.run.endMs);
    };

    return (toMs) => {
      while (nightStartMs(nightIndex + 1, home.longitude) < toMs) {
        workThrough(nightStartMs(nightIndex + 1, home.longitude));
        nightIndex++;
        waiting = makeRuns(nightIndex);
        next = 0;
        active = [];
      }
      workThrough(toMs);
      const ready = pending.filter(({ radioMs }) => radioMs < toMs && radioMs >= doneMs);
      pending = pending.filter(({ radioMs }) => radioMs >= toMs);
      doneMs = Math.max(doneMs, toMs);
      return ready.sort(compareSpots).map(({ spot }) => spot);
    };
  };

  function* spots(fromMs: number, toMs: number): Generator<SimulatedSpot[]> {
    const advance = createCursor(fromMs, (radioMs) => radioMs, plan.antennaAt);
    for (let atMs = fromMs; atMs < toMs;) {
      atMs = Math.min(toMs, atMs + batchMs);
      const batch = advance(atMs);
      if (batch.length > 0) yield batch;
    }
  }

  const live = ({ fromMs, speed = 1, antennaAt = plan.antennaAt }: LiveOptions): LiveFeed => {
    if (!(speed > 0)) throw new RangeError(`speed must be above 0, got ${speed}`);
    const wallMs = (radioMs: number): number => Math.round(fromMs + (radioMs - fromMs) / speed);
    const advance = createCursor(fromMs, wallMs, antennaAt);
    return { advance: (nowMs) => advance(fromMs + (nowMs - fromMs) * speed) };
  };

  return { stations, startMs, antennaAt: plan.antennaAt, dwells: plan.dwells, spots, live };
}

/** Time, then receiver, call and frequency: a total order that does not depend on how a range was split. */
function compareSpots(a: TimedSpot, b: TimedSpot): number {
  return (
    a.radioMs - b.radioMs ||
    compareText(a.spot.receiver, b.spot.receiver) ||
    compareText(a.spot.call, b.spot.call) ||
    a.spot.freqKhz - b.spot.freqKhz
  );
}

function compareText(a: string, b: string): number {
  return a < b ? -1 : a > b ? 1 : 0;
}
