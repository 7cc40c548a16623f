import { feedMinuteStartMs, feedMinuteToleranceMs } from '../spots/distinct-spots.ts';

export interface Stamp {
  heardAtMs: number;
  uncertaintySeconds: number;
}

/**
 * When a live line was heard. Lines are stamped on arrival, which is good to a second or two; the feed's
 * own clock is good to the minute only. When the two are more than 90 s apart, one of them cannot be
 * right: the feed was late (a backlog after a lost connection, a buffer that waited for the database) or
 * this machine's clock was moved. Then the feed's minute is the time, and all of that minute possible.
 *
 * The feed's minute belongs to the day on which it is nearest to the arrival: 2359Z that arrives at
 * 00:00:04 is yesterday's.
 */
export function stampArrival(arrivedAtMs: number, feedMinute: number): Stamp {
  const minuteStartMs = feedMinuteStartMs(feedMinute, arrivedAtMs);
  return Math.abs(arrivedAtMs - minuteStartMs) > feedMinuteToleranceMs
    ? { heardAtMs: minuteStartMs, uncertaintySeconds: 60 }
    : { heardAtMs: arrivedAtMs, uncertaintySeconds: 0 };
}
