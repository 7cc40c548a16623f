import type { SpotRecord } from './spot-record.ts';

/**
 * The rows to store, in the order of the table's unique key (second, receiver, call, frequency), without
 * doubles inside the batch; of equal ones the first counts. The order makes concurrent writers meet each
 * other's rows in one sequence, so that they cannot deadlock, and the index grow at its end.
 */
export function distinctSpots(spots: readonly SpotRecord[], callIds: Int32Array): Int32Array {
  const seconds = Float64Array.from(spots, (spot) => Math.floor(spot.heardAtMs / 1000));
  const compareKeys = (one: number, other: number): number =>
    seconds[one]! - seconds[other]! ||
    spots[one]!.receiverId - spots[other]!.receiverId ||
    callIds[one]! - callIds[other]! ||
    spots[one]!.freq100Hz - spots[other]!.freq100Hz;
  const order = Int32Array.from(spots, (_, row) => row);
  // Files come sorted nearly always, if not by the whole key: the sort is fast on what is sorted already.
  order.sort((one, other) => compareKeys(one, other) || one - other);
  let kept = 0;
  for (let i = 0; i < order.length; i++) {
    const row = order[i]!;
    if (kept > 0 && compareKeys(order[kept - 1]!, row) === 0) continue;
    order[kept++] = row;
  }
  return order.subarray(0, kept);
}

/** A live line whose feed minute and arrival differ by more than this gets the feed's minute as its time. */
export const feedMinuteToleranceMs = 90_000;

const minuteMs = 60_000;
const dayMs = 86_400_000;

/** The instant at which the feed's minute of the day began: of all days' the one nearest to `nearMs`. */
export function feedMinuteStartMs(feedMinute: number, nearMs: number): number {
  const ofDay = feedMinute * minuteMs;
  return Math.round((nearMs - ofDay) / dayMs) * dayMs + ofDay;
}

/**
 * The rows that are left when live lines that a feed sent again are dropped: of spots equal in receiver,
 * call, frequency and feed minute the earliest counts. See `writeSpots`.
 */
export function withoutReplays(
  spots: readonly SpotRecord[],
  callIds: Int32Array,
  order: Int32Array,
): Int32Array {
  const seen = new Set<string>();
  return order.filter((row) => {
    const { heardAtMs, receiverId, freq100Hz, feedMinute } = spots[row]!;
    if (feedMinute === null) return true;
    // The whole key as text, not a hash of it: two different spots must never look alike.
    const key = `${receiverId} ${callIds[row]} ${freq100Hz} ${feedMinuteStartMs(feedMinute, heardAtMs)}`;
    if (seen.has(key)) return false;
    seen.add(key);
    return true;
  });
}
