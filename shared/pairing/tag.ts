import { sharedLength, type DwellColumns, type SpotColumns } from './columns.ts';
import { dwellFinder, indexDwells, type DwellIndex } from './dwell-index.ts';

/** Tag of a spot that lies in a dwell and outside its guard. */
export const TAGGED = 0;
/** Tag of a spot whose antenna may still have been the one before, or may already be the next. */
export const GUARDED = 1;
/** Tag of a spot whose receiver had no dwell at that time. */
export const UNTAGGED = 2;

/** The antenna and tag of each spot, in the order of the spots. */
export interface TagColumns {
  /** Antenna id; 0 when untagged. A guarded spot keeps the antenna of its dwell. */
  antenna: Int32Array;
  /** `TAGGED`, `GUARDED` or `UNTAGGED`. */
  tag: Uint8Array;
  /** Row of the dwell in the caller's columns, -1 when untagged. */
  dwell: Int32Array;
}

/**
 * Whether a spot at `timeMs`, known to `uncertaintyMs`, in the dwell `[startMs, endMs)` is guarded.
 *
 * A minute on a spot line is the minute in which the station was heard, cut and not rounded (common
 * practice of the trade's one-line spot), so an uncertainty u means: heard somewhere in [t, t + u).
 * The spot counts only if all of that stretch lies in one dwell outside its guard, hence a switch at
 * t + u itself does no harm and one before it does. A stretch of t - u to t + u would also throw away
 * the minute after every guard, for a doubt that the line does not leave.
 *
 * Every dwell's start has a guard, also when the dwell before it was on the same antenna: a switch log
 * row says that something was switched at that moment, and the log cannot say that nothing clicked.
 */
export function isGuarded(
  timeMs: number,
  uncertaintyMs: number,
  startMs: number,
  endMs: number,
  guardMs: number,
): boolean {
  return timeMs < startMs + guardMs || timeMs + uncertaintyMs > endMs;
}

/**
 * Gives every spot its antenna by the switch log: the dwell of its receiver with start <= t < end.
 *
 * Spots may come in any order: O(n) when they are in order of time (or of receiver, then time), up to
 * O(n log d) for n shuffled spots and d dwells. `guardSeconds` is a number of seconds, 0 or more.
 * Throws RangeError for overlapping or empty dwells, columns of unequal length, or a negative guard.
 */
export function tagSpots(
  spots: Pick<SpotColumns, 'timeMs' | 'receiver' | 'uncertaintySeconds'>,
  dwells: DwellColumns,
  guardSeconds: number,
): TagColumns {
  const { timeMs, receiver, uncertaintySeconds } = spots;
  const n = sharedLength('spots', { timeMs, receiver, uncertaintySeconds });
  if (!(guardSeconds >= 0)) throw new RangeError(`guardSeconds is ${guardSeconds}; it must be 0 or more.`);
  const index = indexDwells(dwells);
  const { position, tag } = locateSpots(spots, index, guardSeconds);
  const antenna = new Int32Array(n);
  const dwell = new Int32Array(n).fill(-1);
  for (let i = 0; i < n; i++) {
    if (tag[i] === UNTAGGED) continue;
    antenna[i] = index.antenna[position[i]!]!;
    dwell[i] = index.row[position[i]!]!;
  }
  return { antenna, tag, dwell };
}

/** As `tagSpots`, with the dwell's position in the index (-1 when untagged): what pairing works on. */
export function locateSpots(
  spots: Pick<SpotColumns, 'timeMs' | 'receiver' | 'uncertaintySeconds'>,
  index: DwellIndex,
  guardSeconds: number,
): { position: Int32Array; tag: Uint8Array } {
  const { timeMs, receiver, uncertaintySeconds } = spots;
  const finder = dwellFinder(index);
  const position = new Int32Array(timeMs.length);
  const tag = new Uint8Array(timeMs.length);
  const guardMs = guardSeconds * 1000;
  for (let i = 0; i < timeMs.length; i++) {
    const time = timeMs[i]!;
    const found = finder.find(receiver[i]!, time);
    position[i] = found;
    if (found < 0) tag[i] = UNTAGGED;
    else if (
      isGuarded(time, uncertaintySeconds[i]! * 1000, index.startMs[found]!, index.endMs[found]!, guardMs)
    ) {
      tag[i] = GUARDED;
    }
  }
  return { position, tag };
}
