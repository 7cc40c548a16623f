/**
 * A pattern at one elevation: levels by azimuth, measured in the field or cut out of a model, and the figures
 * that describe it.
 */
import { normaliseAzimuth } from './geodesic.ts';

export interface CutPoint {
  /** Clockwise from true north in readings, from the antenna's heading in a normalised cut. */
  azimuthDeg: number;
  levelDb: number;
}

/** Readings further apart than this say nothing about what lies between them. */
export const widestGapDeg = 45;

/**
 * Readings turned so that azimuth 0 is the antenna's heading, with their highest level at 0 dB, in
 * ascending azimuth; readings of one azimuth are averaged in dB.
 *
 * @throws RangeError naming `readings` or `headingDeg`: empty, not finite
 */
export function normaliseCut(readings: readonly CutPoint[], headingDeg = 0): CutPoint[] {
  if (readings.length === 0) throw new RangeError('readings must hold at least one level');
  if (!Number.isFinite(headingDeg)) {
    throw new RangeError(`headingDeg must be a number of degrees, got ${headingDeg}`);
  }
  const byAzimuth = new Map<number, number[]>();
  readings.forEach(({ azimuthDeg, levelDb }, i) => {
    if (!Number.isFinite(azimuthDeg) || !Number.isFinite(levelDb)) {
      throw new RangeError(
        `readings[${i}] must have an azimuth and a level in dB, has ${azimuthDeg}, ${levelDb}`,
      );
    }
    // A millionth of a degree: turning by the heading must not tear equal azimuths apart.
    const azimuth = normaliseAzimuth(Math.round((azimuthDeg - headingDeg) * 1e6) / 1e6);
    byAzimuth.set(azimuth, [...(byAzimuth.get(azimuth) ?? []), levelDb]);
  });
  const cut = [...byAzimuth].map(([azimuthDeg, levels]) => ({ azimuthDeg, levelDb: averageLevelDb(levels) }));
  const highest = Math.max(...cut.map(({ levelDb }) => levelDb));
  return cut
    .map(({ azimuthDeg, levelDb }) => ({ azimuthDeg, levelDb: levelDb - highest }))
    .sort((a, b) => a.azimuthDeg - b.azimuthDeg);
}

/**
 * Average of levels: of the dB values, or of the powers they stand for (which the strongest rule).
 *
 * @throws RangeError when there is none or one is not finite
 */
export function averageLevelDb(levelsDb: readonly number[], by: 'db' | 'power' = 'db'): number {
  if (levelsDb.length === 0 || !levelsDb.every(Number.isFinite)) {
    throw new RangeError('levelsDb must hold at least one level, all of them finite');
  }
  if (by === 'db') return levelsDb.reduce((sum, level) => sum + level, 0) / levelsDb.length;
  // Against the strongest one, so that very low levels do not run out of numbers.
  const most = Math.max(...levelsDb);
  const sum = levelsDb.reduce((total, level) => total + 10 ** ((level - most) / 10), 0);
  return most + 10 * Math.log10(sum / levelsDb.length);
}

/** Level at an azimuth, linear in dB between its neighbours; null in a gap wider than `widestGapDeg`. */
export function levelAtDb(cut: readonly CutPoint[], azimuthDeg: number): number | null {
  const azimuth = normaliseAzimuth(azimuthDeg);
  const exact = cut.find((point) => point.azimuthDeg === azimuth);
  if (exact) return exact.levelDb;
  const first = cut[0]!;
  const last = cut.at(-1)!;
  const next = cut.findIndex((point) => point.azimuthDeg > azimuth);
  const after = next < 0 ? { ...first, azimuthDeg: first.azimuthDeg + 360 } : cut[next]!;
  const before =
    next < 0 ? last : next === 0 ? { ...last, azimuthDeg: last.azimuthDeg - 360 } : cut[next - 1]!;
  const gap = after.azimuthDeg - before.azimuthDeg;
  if (gap > widestGapDeg) return null;
  return before.levelDb + ((azimuth - before.azimuthDeg) / gap) * (after.levelDb - before.levelDb);
}

export interface CutMetrics {
  /** Level at 0 less level at 180 degrees. */
  frontToBackDb: number | null;
  /** Level at 0 less the highest level from 90 to 270 degrees. */
  frontToWorstRearDb: number | null;
  /** Level at 0 less the higher of the levels at 90 and 270 degrees. */
  frontToSideDb: number | null;
  /** Between the points 3 dB below the highest level on either side of it. */
  beamwidthDeg: number | null;
  /** Azimuth of the highest level. */
  peakAzimuthDeg: number;
}

/** How far from the peak, in one direction round the circle, the level has fallen by 3 dB; null if never. */
function fall(cut: readonly CutPoint[], peak: number, direction: 1 | -1): number | null {
  const count = cut.length;
  const top = cut[peak]!;
  let here = { turned: 0, levelDb: top.levelDb };
  for (let j = 1; j < count; j++) {
    const point = cut[(peak + direction * j + count * j) % count]!;
    const turned = normaliseAzimuth(direction * (point.azimuthDeg - top.azimuthDeg));
    if (turned - here.turned > widestGapDeg) return null;
    const goal = top.levelDb - 3;
    if (point.levelDb <= goal) {
      const share = (here.levelDb - goal) / (here.levelDb - point.levelDb);
      return here.turned + share * (turned - here.turned);
    }
    here = { turned, levelDb: point.levelDb };
  }
  return null;
}

/**
 * Front-to-back, front-to-worst-rear, front-to-side and -3 dB beamwidth of a cut whose azimuth 0 is the
 * antenna's heading (see normaliseCut). A figure is null where readings it needs are missing, or where the
 * pattern never falls by 3 dB.
 *
 * @throws RangeError naming `cut` when it is empty
 */
export function cutMetrics(cut: readonly CutPoint[]): CutMetrics {
  if (cut.length === 0) throw new RangeError('cut must hold at least one level');
  const front = levelAtDb(cut, 0);
  const back = levelAtDb(cut, 180);
  const sides = [levelAtDb(cut, 90), levelAtDb(cut, 270)];
  const bothSides = sides.every((level) => level !== null) ? Math.max(...sides) : null;
  const rear = cut.filter(({ azimuthDeg }) => azimuthDeg >= 90 && azimuthDeg <= 270);
  // From side to side without a hole: between neighbours the level is never above the higher of both.
  const edges = [90, ...rear.map(({ azimuthDeg }) => azimuthDeg), 270];
  const whole = edges.every((azimuth, i) => i === 0 || azimuth - edges[i - 1]! <= widestGapDeg);
  const worst =
    bothSides !== null && whole ? Math.max(bothSides, ...rear.map(({ levelDb }) => levelDb)) : null;
  const less = (level: number | null) => (front === null || level === null ? null : front - level);
  let peak = 0;
  cut.forEach(({ levelDb }, i) => {
    if (levelDb > cut[peak]!.levelDb) peak = i;
  });
  const right = fall(cut, peak, 1);
  const left = fall(cut, peak, -1);
  return {
    frontToBackDb: less(back),
    frontToWorstRearDb: less(worst),
    frontToSideDb: less(bothSides),
    beamwidthDeg: right === null || left === null ? null : right + left,
    peakAzimuthDeg: cut[peak]!.azimuthDeg,
  };
}

export interface CutDeviation {
  /** Readings that the model has a level for. */
  n: number;
  rmsDb: number;
  /** The largest one with its sign, reading less model, and where it is. */
  largestDb: number;
  largestAzimuthDeg: number;
}

/**
 * How far a measured cut lies from the modelled one, at the azimuths of the readings; both normalised.
 *
 * Null when the model has no level at any of them.
 */
export function cutDeviation(measured: readonly CutPoint[], model: readonly CutPoint[]): CutDeviation | null {
  if (model.length === 0) return null;
  const differences = measured.flatMap(({ azimuthDeg, levelDb }) => {
    const expected = levelAtDb(model, azimuthDeg);
    return expected === null ? [] : [{ azimuthDeg, differenceDb: levelDb - expected }];
  });
  if (differences.length === 0) return null;
  const squares = differences.reduce((sum, { differenceDb }) => sum + differenceDb ** 2, 0);
  const largest = differences.reduce((most, one) =>
    Math.abs(one.differenceDb) > Math.abs(most.differenceDb) ? one : most,
  );
  return {
    n: differences.length,
    rmsDb: Math.sqrt(squares / differences.length),
    largestDb: largest.differenceDb,
    largestAzimuthDeg: largest.azimuthDeg,
  };
}
