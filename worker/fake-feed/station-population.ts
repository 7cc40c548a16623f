import type { BandMetres } from '../../shared/radio/bands.ts';
import { positionOfCall, type CallPosition } from '../../shared/radio/call-position.ts';
import { parseCallSign } from '../../shared/radio/call-sign.ts';
import { pathTo, placeAt } from '../../shared/radio/geodesic.ts';
import { isRefusal, type Place } from '../../shared/radio/place.ts';
import { createRandom, type Random } from '../../shared/stats/random.ts';
import { noiseKey } from './hash-noise.ts';
import { stationAreas, type StationArea } from './station-areas.ts';

/** One invented transmitting station somewhere in the world. */
export interface SimulatedStation {
  call: string;
  area: StationArea;
  place: Place;
  /** As seen from the receiving station. */
  azimuthDeg: number;
  distanceKm: number;
  /** Transmitter and antenna against 100 W into a plain vertical, dB. */
  strengthDb: number;
  /** How often it is on the air against the average station. */
  activity: number;
  /** How much it likes each band; the values sum to 1. */
  bandLiking: ReadonlyMap<BandMetres, number>;
  /** Sending speed it is comfortable with, words a minute. */
  speedWpm: number;
  /** Names its noise. */
  key: number;
}

export const populationSize = 450;

/** Suffixes QRA to QUZ: Q-code groups, which the ITU keeps out of call signs, so nobody can own one. */
function drawSuffix(random: Random): string {
  return `Q${random.pick(['R', 'S', 'T', 'U'])}${String.fromCharCode(65 + random.integer(26))}`;
}

function positionOf(call: string): CallPosition {
  const parsed = parseCallSign(call);
  const position = isRefusal(parsed) ? parsed : positionOfCall(parsed);
  if (isRefusal(position)) throw new Error(`The simulated call ${call} has no place: ${position.reason}`);
  return position;
}

/** Numbers of stations by area, in proportion to the weights (largest remainders), adding up to `size`. */
function sharesOf(size: number): number[] {
  const total = stationAreas.reduce((sum, area) => sum + area.weight, 0);
  const exact = stationAreas.map((area) => (area.weight / total) * size);
  const shares = exact.map(Math.floor);
  const missing = size - shares.reduce((sum, share) => sum + share, 0);
  const byRemainder = exact
    .map((value, index) => ({ index, remainder: value - Math.floor(value) }))
    .sort((a, b) => b.remainder - a.remainder || a.index - b.index);
  for (const { index } of byRemainder.slice(0, missing)) shares[index]! += 1;
  return shares;
}

const bandPopularity: ReadonlyMap<BandMetres, number> = new Map([
  [160, 0.85],
  [80, 1.05],
  [40, 1.15],
  [30, 0.35],
]);

function drawBandLiking(random: Random, bands: readonly BandMetres[]): Map<BandMetres, number> {
  const raw = bands.map((band) => (bandPopularity.get(band) ?? 1) * Math.exp(0.7 * random.normal()));
  const total = raw.reduce((sum, value) => sum + value, 0);
  return new Map(bands.map((band, index) => [band, raw[index]! / total]));
}

/**
 * The stations that this seed puts on the air: unique calls with prefixes that fit their countries.
 *
 * @param home the receiving station
 */
export function createStationPopulation(
  seed: number,
  home: Place,
  bands: readonly BandMetres[],
  size = populationSize,
): SimulatedStation[] {
  const root = createRandom(seed).fork('population');
  const taken = new Set<string>();
  const stations: SimulatedStation[] = [];
  sharesOf(size).forEach((share, areaIndex) => {
    const area = stationAreas[areaIndex]!;
    const random = root.fork(area.name);
    for (let i = 0; i < share; i++) {
      let call: string;
      do {
        call = random.pick(area.prefixes) + random.pick([...area.digits]) + drawSuffix(random);
      } while (taken.has(call));
      taken.add(call);
      const position = positionOf(call);
      // The root spreads stations evenly over the circle's area.
      const place = placeAt(
        position,
        random.uniform() * 360,
        Math.sqrt(random.uniform()) * position.radiusKm,
      );
      const { azimuthDeg, distanceKm } = pathTo(home, place);
      stations.push({
        call,
        area,
        place,
        azimuthDeg,
        distanceKm,
        strengthDb: random.pick([-3, 0, 0, 6, 10]) + 3 * random.normal(),
        activity: Math.exp(0.8 * random.normal() - 0.32),
        bandLiking: drawBandLiking(random, bands),
        speedWpm: Math.round(24 + 4.5 * random.normal()),
        key: noiseKey(seed, stations.length, random.integer(0x7fffffff)),
      });
    }
  });
  return stations;
}
