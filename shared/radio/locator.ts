/**
 * Maidenhead locators, both ways (the IARU Region 1 convention of 1980): fields of 20 x 10 degrees
 * (AA to RR), squares of 2 x 1 degree (00 to 99), subsquares of 5' x 2.5' (aa to xx) and extended
 * subsquares of 30" x 15" (00 to 99); longitude first, counted from 180 W and 90 S.
 */
import type { Place, Refusal } from './place.ts';

/** Number of characters. */
export type LocatorLength = 2 | 4 | 6 | 8;

export interface LocatorCell extends Place {
  /** As usually written: field in capitals, subsquare in small letters ("IO53ab12"). */
  locator: string;
  /** Size of the cell; `latitude` and `longitude` are its centre. */
  widthDeg: number;
  heightDeg: number;
  /** No point of the cell lies further than this from its centre. */
  radiusKm: number;
}

interface Pair {
  /** Cells along each side of the parent. */
  count: number;
  /** Cells over the whole circle of 360 degrees of longitude (and over 180 of latitude). */
  cells: number;
  first: 'A' | '0' | 'a';
  accepts: string;
}

const pairs: readonly Pair[] = [
  { count: 18, cells: 18, first: 'A', accepts: 'letters A to R' },
  { count: 10, cells: 180, first: '0', accepts: 'digits' },
  { count: 24, cells: 4320, first: 'a', accepts: 'letters A to X' },
  { count: 10, cells: 43_200, first: '0', accepts: 'digits' },
];

const ordinals = ['first', 'second', 'third', 'fourth'];
const kmPerDegree = 111.7;

/** Reads a locator of 2, 4, 6 or 8 characters in any letter case, or says in a sentence what is wrong. */
export function parseLocator(text: string): LocatorCell | Refusal {
  const written = text.trim();
  if (![2, 4, 6, 8].includes(written.length)) {
    return {
      reason: `A locator has 2, 4, 6 or 8 characters, such as IO53 or IO53ab; "${clip(written)}" has ${written.length}.`,
    };
  }
  let column = 0;
  let row = 0;
  let locator = '';
  let level = pairs[0]!;
  for (let index = 0; index * 2 < written.length; index += 1) {
    level = pairs[index]!;
    const couple = written.slice(index * 2, index * 2 + 2);
    const cased = level.first === 'a' ? couple.toLowerCase() : couple.toUpperCase();
    const [east, north] = [...cased].map((letter) => letter.charCodeAt(0) - level.first.charCodeAt(0));
    if (!isDigitOf(east, level.count) || !isDigitOf(north, level.count)) {
      return {
        reason: `The ${ordinals[index]} pair of the locator "${written}" is "${couple}"; it must be two ${level.accepts}.`,
      };
    }
    column = column * level.count + east;
    row = row * level.count + north;
    locator += cased;
  }
  const widthDeg = 360 / level.cells;
  const heightDeg = 180 / level.cells;
  const latitude = ((row + 0.5) * 180) / level.cells - 90;
  const longitude = ((column + 0.5) * 360) / level.cells - 180;
  return {
    locator,
    latitude,
    longitude,
    widthDeg,
    heightDeg,
    radiusKm: halfDiagonalKm(latitude, widthDeg, heightDeg),
  };
}

/**
 * The locator of the cell that holds a place. Cells are closed to the south and west; the north pole
 * belongs to the topmost row, longitude wraps at 180. Throws a RangeError for a place off the globe.
 */
export function locatorOf(place: Place, length: LocatorLength = 6): string {
  if (!(Math.abs(place.latitude) <= 90)) {
    throw new RangeError(`latitude must be between -90 and 90 degrees, was ${place.latitude}`);
  }
  if (!(Math.abs(place.longitude) <= 180)) {
    throw new RangeError(`longitude must be between -180 and 180 degrees, was ${place.longitude}`);
  }
  const { cells } = pairs[length / 2 - 1]!;
  // A place that is a cell's south-west corner to within rounding belongs to that cell, not to its neighbour.
  const nudge = 1e-9;
  let column = Math.floor(((place.longitude + 180) * cells) / 360 + nudge) % cells;
  let row = Math.min(Math.floor(((place.latitude + 90) * cells) / 180 + nudge), cells - 1);
  let locator = '';
  for (let index = length / 2 - 1; index >= 0; index -= 1) {
    const { count, first } = pairs[index]!;
    const code = first.charCodeAt(0);
    locator = String.fromCharCode(code + (column % count), code + (row % count)) + locator;
    column = Math.floor(column / count);
    row = Math.floor(row / count);
  }
  return locator;
}

function isDigitOf(value: number | undefined, count: number): value is number {
  return value !== undefined && value >= 0 && value < count;
}

/** Centre to corner, on the side nearer the equator where the cell is widest; slightly generous. */
function halfDiagonalKm(latitude: number, widthDeg: number, heightDeg: number): number {
  const widestLatitude = Math.max(0, Math.abs(latitude) - heightDeg / 2);
  const halfWidthKm = (widthDeg / 2) * kmPerDegree * Math.cos((widestLatitude * Math.PI) / 180);
  return Math.hypot(halfWidthKm, (heightDeg / 2) * kmPerDegree);
}

function clip(text: string): string {
  return text.length > 20 ? `${text.slice(0, 20)}…` : text;
}
