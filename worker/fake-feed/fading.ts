import { noiseKey, normalAt, smoothNoise } from './hash-noise.ts';

/**
 * How deep a signal fades, standard deviations in dB. Slow fading is the path's and the same on every
 * antenna; the rest differs between antennas (angle of arrival, polarisation), or between receivers. The
 * night's own term is why units of one station in one night are not independent: the standing wave of
 * that night favours one antenna for hours.
 */
export interface FadingDepth {
  /** Common to all antennas, over some 20 minutes. */
  driftDb: number;
  /** Common to all antennas, over some 3 minutes. */
  slowDb: number;
  /** Common to all antennas, over seconds. */
  fastDb: number;
  /** One antenna for one station, band and night. */
  antennaNightDb: number;
  /** One antenna, over some 10 minutes. */
  antennaSlowDb: number;
  /** One antenna, over seconds. */
  antennaFastDb: number;
  /** One receiver's measurement of one report. */
  measurementDb: number;
}

export const demoFading: FadingDepth = {
  driftDb: 3,
  slowDb: 2.5,
  fastDb: 2.5,
  antennaNightDb: 1.8,
  antennaSlowDb: 1.2,
  antennaFastDb: 2,
  measurementDb: 1,
};

export const studyFading: FadingDepth = {
  driftDb: 1.5,
  slowDb: 1.5,
  fastDb: 1.5,
  antennaNightDb: 1,
  antennaSlowDb: 1,
  antennaFastDb: 1.5,
  measurementDb: 0.8,
};

/** Fading common to all antennas. `pathKey` names the station and band; `timeMs` is UTC. */
export function commonFadingDb(depth: FadingDepth, pathKey: number, timeMs: number): number {
  return (
    depth.driftDb * smoothNoise(noiseKey(pathKey, 1), timeMs, 1200) +
    depth.slowDb * smoothNoise(noiseKey(pathKey, 2), timeMs, 180) +
    depth.fastDb * smoothNoise(noiseKey(pathKey, 3), timeMs, 8)
  );
}

/** What one antenna adds to it. Two receivers on the same antenna share it. */
export function antennaFadingDb(
  depth: FadingDepth,
  pathKey: number,
  antenna: number,
  nightIndex: number,
  timeMs: number,
): number {
  return (
    depth.antennaNightDb * normalAt(noiseKey(pathKey, 4, antenna), nightIndex) +
    depth.antennaSlowDb * smoothNoise(noiseKey(pathKey, 5, antenna), timeMs, 600) +
    depth.antennaFastDb * smoothNoise(noiseKey(pathKey, 6, antenna), timeMs, 6)
  );
}
