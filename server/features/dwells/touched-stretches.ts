import { nightDate, nightIndexOf } from '../../../shared/radio/night.ts';
import type { DwellRecord, DwellStep } from './dwell-record.ts';

/** Half-open stretch of time `[fromMs, toMs)` on one receiver; `toMs` may be Infinity. */
export interface Stretch {
  receiverId: number;
  fromMs: number;
  toMs: number;
}

/** Longest uncertainty of a spot's time that tagging knows (one byte of seconds). */
const longestUncertaintyMs = 255_000;

/**
 * Where a spot's tag can change, merged, by receiver and time. A tag depends on the one dwell that holds the
 * spot, so this is the old and the new extent of every changed dwell; of a dwell that keeps its antenna only
 * what lies about the end that moved: between old and new start and the guard after it, between old and new
 * end and the time before it in which a spot known to the minute only might lie across the switch.
 */
export function touchedStretches(steps: readonly DwellStep[], guardMs: number): Stretch[] {
  const touched: Stretch[] = [];
  for (const { before, after } of steps) {
    if (before && after && before.receiverId === after.receiverId && before.antennaId === after.antennaId) {
      const { receiverId } = before;
      const [oldEnd, newEnd] = [before.endMs ?? Infinity, after.endMs ?? Infinity];
      if (before.startMs !== after.startMs) {
        touched.push({
          receiverId,
          fromMs: Math.min(before.startMs, after.startMs),
          toMs: Math.max(before.startMs, after.startMs) + guardMs,
        });
      }
      if (oldEnd !== newEnd) {
        touched.push({
          receiverId,
          fromMs: Math.min(oldEnd, newEnd) - longestUncertaintyMs,
          toMs: Math.max(oldEnd, newEnd),
        });
      }
      continue;
    }
    for (const dwell of [before, after]) if (dwell) touched.push(wholeOf(dwell));
  }
  return mergeStretches(touched);
}

function wholeOf(dwell: DwellRecord): Stretch {
  return { receiverId: dwell.receiverId, fromMs: dwell.startMs, toMs: dwell.endMs ?? Infinity };
}

export function mergeStretches(stretches: readonly Stretch[]): Stretch[] {
  const sorted = [...stretches].sort((p, q) => p.receiverId - q.receiverId || p.fromMs - q.fromMs);
  const merged: Stretch[] = [];
  for (const stretch of sorted) {
    const last = merged.at(-1);
    if (last && last.receiverId === stretch.receiverId && stretch.fromMs <= last.toMs) {
      last.toMs = Math.max(last.toMs, stretch.toMs);
    } else if (stretch.toMs > stretch.fromMs) merged.push({ ...stretch });
  }
  return merged;
}

/** What lies within `[fromMs, toMs)`. */
export function clipStretches(stretches: readonly Stretch[], fromMs: number, toMs: number): Stretch[] {
  return stretches
    .map((s) => ({ ...s, fromMs: Math.max(s.fromMs, fromMs), toMs: Math.min(s.toMs, toMs) }))
    .filter((s) => s.toMs > s.fromMs);
}

/** The numbers of the slices of time of one length that bounded stretches reach into, ascending. */
export function slicesOf(stretches: readonly Stretch[], indexOf: (timeMs: number) => number): number[] {
  const slices = new Set<number>();
  for (const { fromMs, toMs } of stretches) {
    const last = indexOf(toMs - 1);
    for (let slice = indexOf(fromMs); slice <= last; slice++) slices.add(slice);
  }
  return [...slices].sort((p, q) => p - q);
}

export function nightsOf(stretches: readonly Stretch[], longitudeDeg: number): string[] {
  return slicesOf(stretches, (timeMs) => nightIndexOf(timeMs, longitudeDeg)).map(nightDate);
}
