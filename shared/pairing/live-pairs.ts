import type { DwellColumns, SpotColumns } from './columns.ts';
import { nearestInTime } from './nearest.ts';
import { freqTolerance100Hz, type PairingRules } from './rules.ts';
import { TAGGED, tagSpots } from './tag.ts';

/** Two spots that one transmission left on two receivers on two antennas. */
export interface LiveMatch {
  /** Rows of the caller's columns. Side A has the antenna with the lower id, as in units. */
  spotA: number;
  spotB: number;
  antennaA: number;
  antennaB: number;
}

/**
 * The simultaneous matches among recent spots, newest first (by the later spot of each): what a screen
 * shows while units are still to be made. The same rule as for units: tagged spots outside guards,
 * mutually nearest in time, within the window and the frequency tolerance. Spots may come in any order.
 *
 * Meant for some minutes of spots: O(n log n), and each call's spots are compared receiver by receiver.
 * Throws RangeError as `tagSpots` does.
 */
export function findLivePairs(spots: SpotColumns, dwells: DwellColumns, rules: PairingRules): LiveMatch[] {
  const { antenna, tag } = tagSpots(spots, dwells, rules.guardSeconds);
  const matches: LiveMatch[] = [];
  for (const rows of groupRows(spots, (row) => tag[row] === TAGGED)) {
    const sides = [...groupSides(rows, spots, antenna).values()];
    for (const [i, one] of sides.entries()) {
      for (const other of sides.slice(i + 1)) {
        if (one.receiver === other.receiver || one.antenna === other.antenna) continue;
        const [a, b] = one.antenna < other.antenna ? [one, other] : [other, one];
        for (const [spotA, spotB] of mutuallyNearest(a.rows, b.rows, spots, rules)) {
          matches.push({ spotA, spotB, antennaA: a.antenna, antennaB: b.antenna });
        }
      }
    }
  }
  const newer = ({ spotA, spotB }: LiveMatch): number => Math.max(spots.timeMs[spotA]!, spots.timeMs[spotB]!);
  return matches.sort((one, other) => newer(other) - newer(one));
}

/** Rows of each call and band, in order of time. */
function groupRows(spots: SpotColumns, use: (row: number) => boolean): Iterable<number[]> {
  const order = Array.from(spots.timeMs, (_, row) => row)
    .filter(use)
    .sort((one, other) => spots.timeMs[one]! - spots.timeMs[other]! || one - other);
  const groups = new Map<string, number[]>();
  for (const row of order) append(groups, `${spots.call[row]} ${spots.band[row]}`, row);
  return groups.values();
}

interface Side {
  receiver: number;
  antenna: number;
  rows: number[];
}

function groupSides(rows: readonly number[], spots: SpotColumns, antenna: Int32Array): Map<string, Side> {
  const sides = new Map<string, Side>();
  for (const row of rows) {
    const receiver = spots.receiver[row]!;
    const key = `${receiver} ${antenna[row]}`;
    const side = sides.get(key);
    if (side === undefined) sides.set(key, { receiver, antenna: antenna[row]!, rows: [row] });
    else side.rows.push(row);
  }
  return sides;
}

function mutuallyNearest(
  a: readonly number[],
  b: readonly number[],
  spots: SpotColumns,
  rules: PairingRules,
): [number, number][] {
  const both = [...a, ...b];
  const times = Float64Array.from(both, (row) => spots.timeMs[row]!);
  const nearest = new Int32Array(both.length);
  nearestInTime(times, 0, a.length, a.length, both.length, nearest);
  nearestInTime(times, a.length, both.length, 0, a.length, nearest);
  const found: [number, number][] = [];
  for (let i = 0; i < a.length; i++) {
    const j = nearest[i]!;
    if (nearest[j] !== i) continue;
    const [spotA, spotB] = [both[i]!, both[j]!];
    const apartMs = Math.abs(spots.timeMs[spotA]! - spots.timeMs[spotB]!);
    const apart100Hz = Math.abs(spots.freq100Hz[spotA]! - spots.freq100Hz[spotB]!);
    if (apartMs <= rules.windowSeconds * 1000 && apart100Hz <= freqTolerance100Hz(rules)) {
      found.push([spotA, spotB]);
    }
  }
  return found;
}

function append(groups: Map<string, number[]>, key: string, row: number): void {
  const rows = groups.get(key);
  if (rows === undefined) groups.set(key, [row]);
  else rows.push(row);
}
