import { nightIndexOf } from '../../../shared/radio/night.ts';
import type { Place } from '../../../shared/radio/place.ts';
import { nightSun } from '../../../shared/radio/sun.ts';
import { formatDuration } from '../../../shared/format.ts';

/** The next turn of the sun in words: "sunset in 1 h 12 min", "sunrise in 45 min", or that there is none. */
export function sunWords(nowMs: number, place: Place): string {
  const night = nightIndexOf(nowMs, place.longitude);
  const tonight = nightSun(night, place);
  const turns = [
    { word: 'sunset', at: tonight.sunsetMs },
    { word: 'sunrise', at: tonight.sunriseMs },
    // After sunrise the night lasts until noon, and the next sunset belongs to the night after it.
    { word: 'sunset', at: nightSun(night + 1, place).sunsetMs },
  ];
  const next = turns.find(({ at }) => at !== null && at > nowMs);
  // Beyond a day away there is no sunset worth planning by: the edge of a polar summer or winter.
  if (next?.at && next.at - nowMs < 86_400_000) {
    return `${next.word} in ${formatDuration(Math.floor((next.at - nowMs) / 60_000) * 60)}`;
  }
  return tonight.polar ?? 'no sunset or sunrise within a day';
}
