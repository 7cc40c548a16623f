import { sharedLength, type DwellColumns } from './columns.ts';

/** Dwells sorted by receiver and start, ready to be searched. Made by `indexDwells`. */
export interface DwellIndex {
  /** Receiver ids, ascending. */
  receivers: Int32Array;
  /** Dwells of `receivers[i]` are the positions `first[i]` to `first[i + 1] - 1`. */
  first: Int32Array;
  /** Position -> row of the caller's columns. */
  row: Int32Array;
  startMs: Float64Array;
  endMs: Float64Array;
  antenna: Int32Array;
  /** Position -> index into `sides`. */
  side: Int32Array;
  /** Every (receiver, antenna) that occurs, ascending: one side of a comparison. */
  sides: { receiver: Int32Array; antenna: Int32Array };
}

/**
 * Sorts dwells for tagging: O(d log d) for d dwells. Throws RangeError when a dwell does not end after
 * its start, has an antenna id below 1, or overlaps another dwell of its receiver: with two antennas
 * at once on one receiver no spot could be given an antenna.
 */
export function indexDwells(dwells: DwellColumns): DwellIndex {
  const n = sharedLength('dwells', { ...dwells });
  for (let i = 0; i < n; i++) {
    const start = dwells.startMs[i]!;
    if (!(Number.isFinite(start) && dwells.endMs[i]! > start)) {
      throw new RangeError(
        `Dwell ${i} runs from ${start} to ${dwells.endMs[i]}: it must end after it starts.`,
      );
    }
    if (dwells.antenna[i]! < 1) {
      throw new RangeError(`Dwell ${i} has antenna id ${dwells.antenna[i]}; ids start at 1.`);
    }
  }
  const row = Int32Array.from({ length: n }, (_, i) => i).sort(
    (p, q) => dwells.receiver[p]! - dwells.receiver[q]! || dwells.startMs[p]! - dwells.startMs[q]! || p - q,
  );
  const startMs = new Float64Array(n);
  const endMs = new Float64Array(n);
  const antenna = new Int32Array(n);
  const receivers: number[] = [];
  const first: number[] = [];
  for (let p = 0; p < n; p++) {
    const i = row[p]!;
    startMs[p] = dwells.startMs[i]!;
    endMs[p] = dwells.endMs[i]!;
    antenna[p] = dwells.antenna[i]!;
    const receiver = dwells.receiver[i]!;
    if (receiver !== receivers[receivers.length - 1]) {
      receivers.push(receiver);
      first.push(p);
    } else if (startMs[p]! < endMs[p - 1]!) {
      throw new RangeError(`Dwells ${row[p - 1]} and ${i} of receiver ${receiver} overlap.`);
    }
  }
  first.push(n);
  const index = {
    receivers: Int32Array.from(receivers),
    first: Int32Array.from(first),
    row,
    startMs,
    endMs,
    antenna,
  };
  return { ...index, ...indexSides(index) };
}

function indexSides(
  index: Pick<DwellIndex, 'receivers' | 'first' | 'antenna'>,
): Pick<DwellIndex, 'side' | 'sides'> {
  const side = new Int32Array(index.antenna.length);
  const receiver: number[] = [];
  const antenna: number[] = [];
  for (let r = 0; r < index.receivers.length; r++) {
    const own = index.antenna.subarray(index.first[r]!, index.first[r + 1]!);
    const known = new Map<number, number>();
    for (const id of Int32Array.from(new Set(own)).sort()) {
      known.set(id, receiver.length);
      receiver.push(index.receivers[r]!);
      antenna.push(id);
    }
    for (let p = index.first[r]!; p < index.first[r + 1]!; p++) side[p] = known.get(index.antenna[p]!)!;
  }
  return { side, sides: { receiver: Int32Array.from(receiver), antenna: Int32Array.from(antenna) } };
}

/** Finds the dwells of one spot after another. Made by `dwellFinder`. */
export interface DwellFinder {
  /** Position in the index of the dwell with start <= t < end on that receiver, or -1. */
  find(receiver: number, timeMs: number): number;
}

/**
 * A finder with one cursor per receiver: spots that come in order of time cost O(1) each, however the
 * receivers are mixed; a spot out of order costs a binary search, O(log d).
 */
export function dwellFinder(index: DwellIndex): DwellFinder {
  const { receivers, first, startMs, endMs } = index;
  const slotOf = new Map<number, number>();
  receivers.forEach((receiver, slot) => slotOf.set(receiver, slot));
  // The cursor is the last dwell that started at or before the spot before this one.
  const cursor = Int32Array.from(first.subarray(0, receivers.length));
  let lastReceiver = Number.NaN;
  let slot: number | undefined;

  function startedBy(timeMs: number, from: number, end: number, at: number): number {
    if (startMs[at]! <= timeMs) {
      if (at + 1 === end || timeMs < startMs[at + 1]!) return at;
      if (at + 2 === end || timeMs < startMs[at + 2]!) return at + 1;
    }
    let low = from;
    let high = end;
    while (low < high) {
      const middle = (low + high) >>> 1;
      if (startMs[middle]! <= timeMs) low = middle + 1;
      else high = middle;
    }
    return low - 1;
  }

  return {
    find(receiver, timeMs) {
      if (receiver !== lastReceiver) {
        slot = slotOf.get(receiver);
        lastReceiver = receiver;
      }
      if (slot === undefined) return -1;
      const from = first[slot]!;
      const position = startedBy(timeMs, from, first[slot + 1]!, cursor[slot]!);
      if (position < from) return -1;
      cursor[slot] = position;
      return timeMs < endMs[position]! ? position : -1;
    },
  };
}
