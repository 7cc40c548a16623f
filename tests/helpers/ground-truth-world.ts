import { dwellColumns, type DwellColumns, type SpotColumns } from '../../shared/pairing/index.ts';
import { nightIndexOfDate } from '../../shared/radio/night.ts';
import type { Random } from '../../shared/stats/index.ts';

/**
 * A small world whose truth is one number a pair of antennas: the generator behind the ground-truth study.
 * The demo's simulator is richer (patterns, propagation), and for that its truth depends on who was heard.
 *
 * A report of one call of station s by receiver r on antenna a, dB before rounding:
 *
 *   level of s + the night's level + shared slow fading (block) + shared fast fading (call)
 *   + gain of a + lasting difference of s + the night's difference + the sector's difference
 *   + deviation of (s, night, a) + unshared slow fading of (s, a, block) + unshared fast fading (call, a)
 *   + offset of r + measurement error (report)
 *
 * Everything but gains, offsets and the sector's difference is drawn normal with mean 0. The three
 * "differences" belong to antenna 1 only. The report is a whole number of dB, and is made when the level
 * is above the threshold.
 */
export interface World {
  nights: number;
  hoursPerNight: number;
  /** By antenna id less one. */
  gainsDb: readonly number[];
  /** By receiver id less one. */
  offsetsDb: readonly number[];
  plan: SwitchingPlan;
  stations: number;
  /** A station's chance to be on the air in a night. */
  activeShare: number;
  /** Spread of how long stations stay: standard deviation of the natural logarithm; 0: all alike. */
  stayingPower: number;
  /** Mean number of blocks of 15 minutes that a station calls without a break. */
  meanStayBlocks: number;
  /** Shortest and longest time between two calls of a station, seconds. */
  callGapSeconds: readonly [number, number];
  /** Level of the stations over the noise. */
  levelDb: { mean: number; sd: number; nightSd: number };
  fading: {
    sharedSlowDb: number;
    sharedFastDb: number;
    /** One station in one night on one antenna: what makes its units alike. */
    nightDeviationDb: number;
    unsharedSlowDb: number;
    unsharedFastDb: number;
    /** Factor by antenna on the three unshared parts; none: 1 for all. */
    unsteadiness: readonly number[] | null;
    measurementDb: number;
  };
  /** Spread of the lasting difference between stations (their directions, say). */
  stationDifferenceSdDb: number;
  /** Spread of the difference between whole nights (wet ground, say), the same for all stations. */
  nightDifferenceSdDb: number;
  /** Difference toward each of twelve sectors; none: the same all round. */
  sectorDifferencesDb: readonly number[] | null;
  threshold: {
    atDb: number;
    /** 0: all calls above, none below. Otherwise the logistic curve's width: half are heard at `atDb`. */
    softnessDb: number;
    /** Share of calls that a receiver misses however strong they are. */
    missedShare: number;
  };
}

/**
 * What the switch does, block by block of 15 minutes. `swap`: two receivers exchange antennas 1 and 2 at
 * each block. `swap-unequal`: antenna 1 is on receiver 1 in two blocks of three. `alternate`: one receiver
 * changes between antennas 1 and 2 every 150 seconds. `rotate`: each receiver gets an antenna drawn anew,
 * never one that another receiver has.
 */
export type SwitchingPlan = 'swap' | 'swap-unequal' | 'alternate' | 'rotate';

export interface Season {
  spots: SpotColumns;
  dwells: DwellColumns;
  stations: { azimuthDeg: number; lastingDb: number }[];
}

export const place = { latitude: 53.5, longitude: -9 };
export const band = 160;
export const firstNight = nightIndexOfDate('2026-11-01');
export const dayMs = 86_400_000;
const blockMs = 900_000;
const firstHour = 18;
const shortestStayBlocks = 0.3;
/** A call is measured some seconds before its report: without the guard, a switch would mix antennas. */
const reportDelayMs = [2_000, 10_000] as const;

/** Antenna of each receiver (by id less one) from `startMs` to the next row; none: the night is over. */
interface Setting {
  startMs: number;
  antennas: number[];
}

function nightOpensMs(night: number): number {
  return (firstNight + night) * dayMs + firstHour * 3_600_000;
}

function settingsOf(world: World, opensMs: number, random: Random): Setting[] {
  const { plan, hoursPerNight, gainsDb, offsetsDb } = world;
  const everyMs = plan === 'alternate' ? blockMs / 6 : blockMs;
  const antennasAt = (k: number): number[] => {
    if (plan === 'swap') return k % 2 === 0 ? [1, 2] : [2, 1];
    if (plan === 'swap-unequal') return k % 3 < 2 ? [1, 2] : [2, 1];
    if (plan === 'alternate') return [1 + (k % 2)];
    const free = gainsDb.map((_, antenna) => antenna + 1);
    return offsetsDb.map(() => free.splice(random.integer(free.length), 1)[0]!);
  };
  return Array.from({ length: (hoursPerNight * 3_600_000) / everyMs }, (_, k) => ({
    startMs: opensMs + k * everyMs,
    antennas: antennasAt(k),
  }));
}

/** Spots, switch log and stations of all nights of one experiment; an equal `random` gives the same. */
export function liveThrough(world: World, random: Random): Season {
  const { fading, levelDb } = world;
  const people = random.fork('stations');
  const stations = Array.from({ length: world.stations }, () => ({
    azimuthDeg: 360 * people.uniform(),
    lastingDb: world.stationDifferenceSdDb * people.normal(),
    levelDb: levelDb.mean + levelDb.sd * people.normal(),
    stayBlocks: world.meanStayBlocks * Math.exp(world.stayingPower * people.normal()),
  }));
  const log: Setting[] = [];
  const spots = spotRows();
  const gains = world.gainsDb.length;
  const unsteadiness = fading.unsteadiness ?? world.gainsDb.map(() => 1);
  const deviationDb = new Float64Array(gains);
  const slowDb = new Float64Array(gains);
  const fastDb = new Float64Array(gains);

  for (let night = 0; night < world.nights; night++) {
    const draw = random.fork(night);
    const opensMs = nightOpensMs(night);
    const closesMs = opensMs + world.hoursPerNight * 3_600_000;
    const settings = settingsOf(world, opensMs, draw.fork('switch'));
    const settingMs = settings[1]!.startMs - opensMs;
    log.push(...settings, { startMs: closesMs, antennas: [] });
    const nightDifferenceDb = world.nightDifferenceSdDb * draw.normal();

    stations.forEach((station, call) => {
      if (draw.uniform() >= world.activeShare) return;
      let atMs = opensMs + draw.uniform() * (closesMs - opensMs);
      const stayMs = blockMs * Math.max(shortestStayBlocks, station.stayBlocks * draw.exponential());
      const leavesMs = Math.min(closesMs, atMs + stayMs);
      const nightLevelDb = station.levelDb + levelDb.nightSd * draw.normal();
      for (let a = 0; a < gains; a++) {
        deviationDb[a] = world.gainsDb[a]! + fading.nightDeviationDb * unsteadiness[a]! * draw.normal();
      }
      const sectorDb = world.sectorDifferencesDb?.[Math.floor(station.azimuthDeg / 30)] ?? 0;
      deviationDb[0]! += station.lastingDb + nightDifferenceDb + sectorDb;
      const freq100Hz = 18_200 + draw.integer(300);
      let block = -1;
      let sharedSlowDb = 0;
      for (; atMs < leavesMs; atMs += 1000 * between(world.callGapSeconds, draw)) {
        if (Math.floor(atMs / blockMs) !== block) {
          block = Math.floor(atMs / blockMs);
          sharedSlowDb = fading.sharedSlowDb * draw.normal();
          for (let a = 0; a < gains; a++) {
            slowDb[a] = fading.unsharedSlowDb * unsteadiness[a]! * draw.normal();
          }
        }
        const sharedDb = nightLevelDb + sharedSlowDb + fading.sharedFastDb * draw.normal();
        for (let a = 0; a < gains; a++) {
          fastDb[a] = fading.unsharedFastDb * unsteadiness[a]! * draw.normal();
        }
        const { antennas } = settings[Math.floor((atMs - opensMs) / settingMs)]!;
        for (let r = 0; r < antennas.length; r++) {
          const a = antennas[r]! - 1;
          const reachingDb = sharedDb + deviationDb[a]! + slowDb[a]! + fastDb[a]! + world.offsetsDb[r]!;
          const measuredDb = reachingDb + fading.measurementDb * draw.normal();
          const timeMs = Math.floor(atMs + between(reportDelayMs, draw));
          if (decodes(world.threshold, measuredDb, draw)) {
            spots.add(timeMs, r + 1, call, freq100Hz, Math.round(measuredDb));
          }
        }
      }
    });
  }
  return { spots: spots.columns(), dwells: dwellsOf(log), stations };
}

function between([from, to]: readonly [number, number], random: Random): number {
  return from + (to - from) * random.uniform();
}

/** Both numbers are always drawn: what is heard must not change what is sent after it. */
function decodes({ atDb, softnessDb, missedShare }: World['threshold'], db: number, random: Random): boolean {
  const luck = random.uniform();
  const missed = random.uniform() < missedShare;
  if (missed) return false;
  return softnessDb === 0 ? db >= atDb : luck < 1 / (1 + Math.exp((atDb - db) / softnessDb));
}

function spotRows() {
  const timeMs: number[] = [];
  const receiver: number[] = [];
  const call: number[] = [];
  const freq100Hz: number[] = [];
  const snrDb: number[] = [];
  return {
    add(time: number, by: number, heard: number, freq: number, db: number): void {
      timeMs.push(time);
      receiver.push(by);
      call.push(heard);
      freq100Hz.push(freq);
      snrDb.push(db);
    },
    columns: (): SpotColumns => ({
      timeMs: Float64Array.from(timeMs),
      receiver: Int32Array.from(receiver),
      call: Int32Array.from(call),
      band: new Int16Array(timeMs.length).fill(band),
      freq100Hz: Int32Array.from(freq100Hz),
      snrDb: Int16Array.from(snrDb),
      uncertaintySeconds: new Uint8Array(timeMs.length),
      speedWpm: new Uint8Array(timeMs.length),
    }),
  };
}

/** Every setting is a row of the switch log, also where a receiver keeps its antenna. */
function dwellsOf(log: readonly Setting[]): DwellColumns {
  return dwellColumns(
    log.flatMap(({ startMs, antennas }, k) =>
      antennas.map((antenna, r) => ({ receiver: r + 1, antenna, startMs, endMs: log[k + 1]!.startMs })),
    ),
  );
}
