/**
 * Gain over all directions: average gain and RDF (receiving directivity factor) of a full pattern table.
 */
import { normaliseAzimuth } from './geodesic.ts';

const radians = Math.PI / 180;

export interface PatternPoint {
  /** Clockwise from true north, or from the antenna's heading. */
  azimuthDeg: number;
  /** Above the horizon, -90 to 90. */
  elevationDeg: number;
  gainDb: number;
}

export interface PatternOptions {
  /**
   * True: only the upper hemisphere counts, nothing is radiated below ground. False: free space, the whole
   * sphere. True unless changed.
   */
  overGround?: boolean;
}

export interface PatternGrid {
  /** Ascending, 0 <= azimuth < 360. */
  azimuthsDeg: number[];
  /** Ascending, from 0 (free space: -90) to 90. */
  elevationsDeg: number[];
  /** [elevation][azimuth] */
  gainDb: number[][];
}

/** Wider steps would miss lobes. */
const widestAzimuthStep = 30;
const widestElevationStep = 15;

const ascending = (values: Iterable<number>) => [...new Set(values)].sort((a, b) => a - b);

/**
 * A table of points as a grid: every azimuth at every elevation, once.
 *
 * Points below the horizon are left out over ground; azimuth 360 may repeat azimuth 0.
 *
 * @throws RangeError naming `points` and the direction: not a number, twice with different gains, missing,
 *   steps too wide (30 degrees of azimuth, 15 of elevation), ends of the elevations missing
 */
export function patternGrid(points: readonly PatternPoint[], options: PatternOptions = {}): PatternGrid {
  const lowest = (options.overGround ?? true) ? 0 : -90;
  const gains = new Map<number, Map<number, number>>();
  points.forEach(({ azimuthDeg, elevationDeg, gainDb }, i) => {
    if (!Number.isFinite(azimuthDeg) || !(Math.abs(elevationDeg) <= 90) || !Number.isFinite(gainDb)) {
      throw new RangeError(
        `points[${i}] must have an azimuth, an elevation from -90 to 90 and a gain in dB, has ${azimuthDeg}, ${elevationDeg}, ${gainDb}`,
      );
    }
    if (elevationDeg < lowest) return;
    const azimuth = normaliseAzimuth(azimuthDeg);
    const row = gains.get(elevationDeg) ?? new Map<number, number>();
    gains.set(elevationDeg, row);
    const before = row.get(azimuth);
    if (before !== undefined && before !== gainDb) {
      throw new RangeError(
        `points hold two gains at azimuth ${azimuth}, elevation ${elevationDeg}: ${before} and ${gainDb} dB`,
      );
    }
    row.set(azimuth, gainDb);
  });
  const elevationsDeg = ascending(gains.keys());
  const azimuthsDeg = ascending([...gains.values()].flatMap((row) => [...row.keys()]));
  if (elevationsDeg[0] !== lowest || elevationsDeg.at(-1) !== 90) {
    throw new RangeError(`points must reach from elevation ${lowest} to 90 degrees`);
  }
  elevationsDeg.forEach((elevation, i) => {
    if (i > 0 && elevation - elevationsDeg[i - 1]! > widestElevationStep) {
      throw new RangeError(
        `points must have elevations in steps of at most ${widestElevationStep} degrees, none lies between ${elevationsDeg[i - 1]!} and ${elevation}`,
      );
    }
  });
  azimuthsDeg.forEach((azimuth, i) => {
    const next = azimuthsDeg[i + 1] ?? azimuthsDeg[0]! + 360;
    if (next - azimuth > widestAzimuthStep) {
      throw new RangeError(
        `points must have azimuths in steps of at most ${widestAzimuthStep} degrees, none lies between ${azimuth} and ${normaliseAzimuth(next)}`,
      );
    }
  });
  const gainDb = elevationsDeg.map((elevation) =>
    azimuthsDeg.map((azimuth) => {
      const gain = gains.get(elevation)!.get(azimuth);
      if (gain === undefined) {
        throw new RangeError(`points must hold a gain at azimuth ${azimuth}, elevation ${elevation}`);
      }
      return gain;
    }),
  );
  return { azimuthsDeg, elevationsDeg, gainDb };
}

const power = (gainDb: number) => 10 ** (gainDb / 10);

/** Mean power over the azimuths of one elevation: each stands for half the way to its neighbours. */
function meanAroundHorizon(azimuthsDeg: readonly number[], gainDb: readonly number[]): number {
  const last = azimuthsDeg.length - 1;
  return gainDb.reduce((sum, gain, i) => {
    const before = i === 0 ? azimuthsDeg[last]! - 360 : azimuthsDeg[i - 1]!;
    const after = i === last ? azimuthsDeg[0]! + 360 : azimuthsDeg[i + 1]!;
    return sum + (power(gain) * (after - before)) / 720;
  }, 0);
}

/**
 * Average gain: the power integrated over all directions, divided by 4 pi, in dB.
 *
 * (1 / 4 pi) times the integral of 10^(gain / 10) cos(elevation) over azimuth and elevation; power taken as
 * linear between the elevations of the grid and the cosine integrated exactly, so that an isotropic
 * pattern is exact on any grid. Over ground nothing below the horizon counts: an isotropic half space has
 * -3.01 dB. Source: the definition of average radiated power, e.g. Balanis, Antenna Theory, 2.6.
 */
export function averageGainDb({ azimuthsDeg, elevationsDeg, gainDb }: PatternGrid): number {
  const means = gainDb.map((row) => meanAroundHorizon(azimuthsDeg, row));
  let sum = 0;
  for (let i = 1; i < means.length; i++) {
    const [a, b] = [elevationsDeg[i - 1]! * radians, elevationsDeg[i]! * radians];
    const [low, high] = [means[i - 1]!, means[i]!];
    const slope = (high - low) / (b - a);
    sum += high * Math.sin(b) - low * Math.sin(a) + slope * (Math.cos(b) - Math.cos(a));
  }
  return 10 * Math.log10(sum / 2);
}

/** Position of a value among ascending ones, and how far it lies toward the next. */
function between(values: readonly number[], value: number): [index: number, share: number] {
  const next = values.findIndex((one) => one > value);
  const index = (next < 0 ? values.length : next) - 1;
  const width = (values[index + 1] ?? values[index]! + 1) - values[index]!;
  return [index, (value - values[index]!) / width];
}

/**
 * Gain in a direction, linear in dB between the points of the grid around it.
 *
 * @throws RangeError when the elevation lies outside the grid or the azimuth is not a number
 */
export function gainAtDb(grid: PatternGrid, azimuthDeg: number, elevationDeg: number): number {
  const { azimuthsDeg, elevationsDeg, gainDb } = grid;
  if (!Number.isFinite(azimuthDeg)) {
    throw new RangeError(`azimuthDeg must be a number of degrees, got ${azimuthDeg}`);
  }
  if (!(elevationDeg >= elevationsDeg[0]! && elevationDeg <= 90)) {
    throw new RangeError(
      `elevationDeg must lie between ${elevationsDeg[0]!} and 90 degrees, got ${elevationDeg}`,
    );
  }
  // The circle opened at the first azimuth, which comes again at its end.
  const azimuth = azimuthsDeg[0]! + normaliseAzimuth(azimuthDeg - azimuthsDeg[0]!);
  const [column, along] = between([...azimuthsDeg, azimuthsDeg[0]! + 360], azimuth);
  const [row, up] = between(elevationsDeg, elevationDeg);
  const onRow = (i: number) => {
    const gains = gainDb[Math.min(i, gainDb.length - 1)]!;
    const next = gains[(column + 1) % gains.length]!;
    return gains[column]! + along * (next - gains[column]!);
  };
  return onRow(row) + up * (onRow(row + 1) - onRow(row));
}

export interface Rdf {
  rdfDb: number;
  averageGainDb: number;
  /** Gain in the wanted direction, or of the peak. */
  gainDb: number;
  azimuthDeg: number;
  elevationDeg: number;
}

/**
 * RDF: gain in the wanted direction, or of the peak, over the average gain. What noise from everywhere is
 * pushed down by.
 *
 * An ideal short vertical over perfect ground has 4.77 dB, as handbooks print.
 *
 * @throws RangeError naming what does not fit, see patternGrid and gainAtDb
 */
export function rdf(
  points: readonly PatternPoint[],
  options: PatternOptions & { wanted?: { azimuthDeg: number; elevationDeg: number } } = {},
): Rdf {
  const grid = patternGrid(points, options);
  const average = averageGainDb(grid);
  const { wanted } = options;
  if (wanted) {
    const gainDb = gainAtDb(grid, wanted.azimuthDeg, wanted.elevationDeg);
    return { rdfDb: gainDb - average, averageGainDb: average, gainDb, ...wanted };
  }
  let peak = { gainDb: -Infinity, azimuthDeg: 0, elevationDeg: 0 };
  grid.gainDb.forEach((row, i) =>
    row.forEach((gainDb, j) => {
      if (gainDb <= peak.gainDb) return;
      peak = { gainDb, azimuthDeg: grid.azimuthsDeg[j]!, elevationDeg: grid.elevationsDeg[i]! };
    }),
  );
  return { rdfDb: peak.gainDb - average, averageGainDb: average, ...peak };
}
