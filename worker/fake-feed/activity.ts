import type { BandMetres } from '../../shared/radio/bands.ts';
import { nightEndMs, nightStartMs } from '../../shared/radio/night.ts';
import type { Place } from '../../shared/radio/place.ts';
import { Sun } from '../../shared/radio/sun.ts';
import { createRandom, type Random } from '../../shared/stats/random.ts';
import { noiseKey } from './hash-noise.ts';
import { pathLevelDb } from './propagation.ts';
import type { SimulatedStation } from './station-population.ts';

/** One station calling on one frequency for a while. */
export interface Run {
  station: SimulatedStation;
  bandMetres: BandMetres;
  nightIndex: number;
  startMs: number;
  endMs: number;
  freqKhz: number;
  speedWpm: number;
  /** Names the station and band in the fading model. */
  pathKey: number;
  /** Number of the run among the station's runs of the night. */
  number: number;
  /** Path level by time, see `levelAt`. */
  levelsDb: Float64Array;
  levelsFromMs: number;
}

const knotMs = 30 * 60_000;
const minuteMs = 60_000;
/** Runs on the air in an average night, sized so that three receivers report some 30,000 spots. */
const runsPerNight = 1300;
/**
 * A path whose median level is this gets half of its stations on the air, dB: people call where they expect
 * to be heard, well above the threshold at which the last receiver just decodes them.
 */
const workableLevelDb = 17;

/** Somebody trying with low power, or gone after a call or two: most of whom one antenna hears alone. */
const briefShare = 0.3;
const briefLossDb = 8;

const cwSegmentsKhz: ReadonlyMap<BandMetres, readonly [number, number]> = new Map([
  [160, [1810.5, 1838]],
  [80, [3505, 3568]],
  [40, [7003, 7038]],
  [30, [10103, 10128]],
]);

/** The run's median level over the noise at a moment of its night, dB on a perfect round antenna. */
export function levelAt(run: Run, timeMs: number): number {
  const position = Math.max(0, (timeMs - run.levelsFromMs) / knotMs);
  const knot = Math.min(Math.floor(position), run.levelsDb.length - 2);
  const weight = Math.min(1, position - knot);
  return run.levelsDb[knot]! * (1 - weight) + run.levelsDb[knot + 1]! * weight;
}

function poisson(random: Random, mean: number): number {
  let count = 0;
  for (let left = mean - random.exponential(); left > 0; left -= random.exponential()) count++;
  return count;
}

interface Opening {
  bandMetres: BandMetres;
  levelsDb: Float64Array;
  /** Chance-weights of a run beginning in each half hour. */
  weights: Float64Array;
  total: number;
}

function drawIndex(random: Random, weights: Float64Array, total: number): number {
  let left = random.uniform() * total;
  for (let i = 0; i < weights.length - 1; i++) {
    left -= weights[i]!;
    if (left < 0) return i;
  }
  return weights.length - 1;
}

export interface ActivityOptions {
  seed: number;
  home: Place;
  bands: readonly BandMetres[];
  stations: readonly SimulatedStation[];
  /** A fixed level for every station in place of the path's own; paths still decide who is on when. */
  fixedLevelDb?: number;
}

/**
 * Who calls when and where through one night, ordered by start. A pure function of its options and the
 * night: every station draws from a generator of its own, so that nights can be made in any order.
 */
export function createActivity(options: ActivityOptions): (nightIndex: number) => Run[] {
  const { seed, home, bands, stations } = options;
  const sun = new Sun();
  const root = createRandom(seed).fork('activity');

  const openingsOf = (
    station: SimulatedStation,
    knots: readonly number[],
    homeDeg: Float64Array,
    conditionsDb: ReadonlyMap<BandMetres, number>,
  ): Opening[] => {
    const awayDeg = sun.altitudesDeg(knots, station.place);
    const distance = Math.min(1.5, 0.4 + station.distanceKm / 5000);
    return bands.map((bandMetres) => {
      const liking = station.bandLiking.get(bandMetres) ?? 0;
      const levelsDb = new Float64Array(knots.length);
      const weights = new Float64Array(knots.length - 1);
      let total = 0;
      for (let i = 0; i < knots.length; i++) {
        const levelDb =
          pathLevelDb(bandMetres, station.distanceKm, [homeDeg[i]!, awayDeg[i]!]) +
          distance * (conditionsDb.get(bandMetres) ?? 0) +
          station.strengthDb;
        levelsDb[i] = levelDb;
        if (i === weights.length) continue;
        const weight = liking / (1 + Math.exp((workableLevelDb - levelDb) / 2));
        weights[i] = weight;
        total += weight;
      }
      return { bandMetres, levelsDb, weights, total };
    });
  };

  return (nightIndex) => {
    const night = root.fork(nightIndex);
    const startMs = nightStartMs(nightIndex, home.longitude);
    const endMs = nightEndMs(nightIndex, home.longitude);
    const knots = Array.from({ length: (endMs - startMs) / knotMs + 1 }, (_, i) => startMs + i * knotMs);
    const homeDeg = sun.altitudesDeg(knots, home);
    const weather = night.fork('conditions');
    const conditionsDb = new Map(bands.map((band) => [band, 2 * weather.normal()]));
    const busy = Math.exp(0.1 * weather.normal());
    const openings = stations.map((station) => openingsOf(station, knots, homeDeg, conditionsDb));
    const opportunity = openings.reduce(
      (sum, list, i) => sum + stations[i]!.activity * list.reduce((total, { total: t }) => total + t, 0),
      0,
    );
    // A short summer night must not be as busy as a long one: opportunity limits the total as well.
    const rate = (busy * runsPerNight) / Math.max(opportunity, stations.length * 4);

    const runs: Run[] = [];
    stations.forEach((station, i) => {
      const random = night.fork(station.call);
      const drafts: Run[] = [];
      for (const opening of openings[i]!) {
        const count = poisson(random, rate * station.activity * opening.total);
        const [lowKhz, highKhz] = cwSegmentsKhz.get(opening.bandMetres)!;
        for (let n = 0; n < count; n++) {
          const knot = drawIndex(random, opening.weights, opening.total);
          const fromMs = Math.round(startMs + (knot + random.uniform()) * knotMs);
          const isBrief = random.uniform() < briefShare;
          const minutes = isBrief ? 1 + 4 * random.uniform() : Math.min(60, 10 + 18 * random.exponential());
          const lengthMs = Math.round(minutes * minuteMs);
          drafts.push({
            station,
            bandMetres: opening.bandMetres,
            nightIndex,
            startMs: fromMs,
            endMs: Math.min(fromMs + lengthMs, endMs),
            freqKhz: Math.round((lowKhz + random.uniform() * (highKhz - lowKhz)) * 10) / 10,
            speedWpm: Math.max(12, Math.min(40, station.speedWpm + random.integer(5) - 2)),
            pathKey: noiseKey(station.key, opening.bandMetres),
            number: 0,
            levelsDb:
              options.fixedLevelDb === undefined
                ? opening.levelsDb.map((levelDb) => levelDb - (isBrief ? briefLossDb : 0))
                : new Float64Array(knots.length).fill(options.fixedLevelDb + station.strengthDb / 2),
            levelsFromMs: startMs,
          });
        }
      }
      // One operator has one transmitter: a run that would begin during another one does not happen.
      drafts.sort((a, b) => a.startMs - b.startMs);
      let freeMs = startMs;
      for (const draft of drafts) {
        if (draft.startMs < freeMs) continue;
        freeMs = draft.endMs + 2 * minuteMs;
        draft.number = runs.length;
        runs.push(draft);
      }
    });
    return runs.sort((a, b) => a.startMs - b.startMs || a.number - b.number);
  };
}
