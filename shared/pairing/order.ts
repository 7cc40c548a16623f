import type { SpotColumns } from './columns.ts';

const DIGIT_BITS = 11;
const DIGITS = 1 << DIGIT_BITS;
/** Times are split into a low part of two digits and a high part, since they exceed 32 bits. */
const LOW_TIME_BITS = 2 * DIGIT_BITS;

/**
 * Order of the spots by (call, band, time): a stable least-significant-digit radix sort of row
 * numbers. O(n) passes with integer digits: a comparison sort with a callback takes ten times as long
 * on ten million rows. Spots that come in order of time, as the database sends them, skip the passes
 * over time. Times are ordered to the millisecond; `settleTies` orders what is left.
 */
export function orderSpots(spots: Pick<SpotColumns, 'timeMs' | 'call' | 'band'>): Uint32Array {
  const n = spots.timeMs.length;
  const sorter = radixSorter(n);
  if (!isAscending(spots.timeMs)) {
    const { low, high } = splitTimes(spots.timeMs);
    sorter.sortBy(low);
    sorter.sortBy(high);
  }
  sorter.sortBy(fromLowest(spots.band));
  sorter.sortBy(fromLowest(spots.call));
  return sorter.order();
}

/**
 * Stable counting sort of row numbers by a small integer key in 0..keyCount-1: O(n + keyCount).
 */
export function orderByKey(key: Uint32Array, keyCount: number): Uint32Array {
  const place = new Uint32Array(keyCount + 1);
  for (let i = 0; i < key.length; i++) place[key[i]! + 1]!++;
  for (let k = 0; k < keyCount; k++) place[k + 1]! += place[k]!;
  const order = new Uint32Array(key.length);
  for (let i = 0; i < key.length; i++) order[place[key[i]!]!++] = i;
  return order;
}

/**
 * Puts the rows `order[from..to)` of one group into one order that does not depend on how they came:
 * by time, receiver, frequency, then stronger first. Insertion sort: the rows are already in order of
 * time, so only equal times move.
 */
export function settleTies(order: Uint32Array, from: number, to: number, spots: SpotColumns): void {
  for (let i = from + 1; i < to; i++) {
    const row = order[i]!;
    let hole = i;
    while (hole > from && precedes(row, order[hole - 1]!, spots)) {
      order[hole] = order[hole - 1]!;
      hole--;
    }
    order[hole] = row;
  }
}

function precedes(p: number, q: number, spots: SpotColumns): boolean {
  if (spots.timeMs[p] !== spots.timeMs[q]) return spots.timeMs[p]! < spots.timeMs[q]!;
  if (spots.receiver[p] !== spots.receiver[q]) return spots.receiver[p]! < spots.receiver[q]!;
  if (spots.freq100Hz[p] !== spots.freq100Hz[q]) return spots.freq100Hz[p]! < spots.freq100Hz[q]!;
  if (spots.snrDb[p] !== spots.snrDb[q]) return spots.snrDb[p]! > spots.snrDb[q]!;
  if (spots.speedWpm[p] !== spots.speedWpm[q]) return spots.speedWpm[p]! > spots.speedWpm[q]!;
  return spots.uncertaintySeconds[p]! < spots.uncertaintySeconds[q]!;
}

function radixSorter(n: number): { sortBy(key: Uint32Array): void; order(): Uint32Array } {
  let current = new Uint32Array(n);
  for (let i = 0; i < n; i++) current[i] = i;
  let spare = new Uint32Array(n);
  const place = new Uint32Array(DIGITS + 1);

  function pass(key: Uint32Array, shift: number): void {
    place.fill(0);
    for (let i = 0; i < n; i++) place[((key[i]! >>> shift) & (DIGITS - 1)) + 1]!++;
    for (let d = 0; d < DIGITS; d++) {
      // One digit holds every row: the pass would change nothing.
      if (place[d + 1] === n) return;
      place[d + 1]! += place[d]!;
    }
    for (let i = 0; i < n; i++) {
      const row = current[i]!;
      spare[place[(key[row]! >>> shift) & (DIGITS - 1)]!++] = row;
    }
    [current, spare] = [spare, current];
  }

  return {
    sortBy(key) {
      let highest = 0;
      for (let i = 0; i < n; i++) if (key[i]! > highest) highest = key[i]!;
      for (let shift = 0; shift < 32 && highest >>> shift > 0; shift += DIGIT_BITS) pass(key, shift);
    },
    order: () => current,
  };
}

function isAscending(timeMs: Float64Array): boolean {
  for (let i = 1; i < timeMs.length; i++) if (timeMs[i]! < timeMs[i - 1]!) return false;
  return true;
}

function fromLowest(values: Int32Array | Int16Array): Uint32Array {
  let lowest = Infinity;
  for (let i = 0; i < values.length; i++) if (values[i]! < lowest) lowest = values[i]!;
  const key = new Uint32Array(values.length);
  for (let i = 0; i < values.length; i++) key[i] = values[i]! - lowest;
  return key;
}

function splitTimes(timeMs: Float64Array): { low: Uint32Array; high: Uint32Array } {
  let earliest = Infinity;
  for (let i = 0; i < timeMs.length; i++) if (timeMs[i]! < earliest) earliest = timeMs[i]!;
  const low = new Uint32Array(timeMs.length);
  const high = new Uint32Array(timeMs.length);
  const lowSpan = 2 ** LOW_TIME_BITS;
  for (let i = 0; i < timeMs.length; i++) {
    const elapsed = Math.floor(timeMs[i]! - earliest);
    const upper = Math.floor(elapsed / lowSpan);
    high[i] = upper;
    low[i] = elapsed - upper * lowSpan;
  }
  return { low, high };
}
