import { nightIndexOf } from '../../../shared/radio/night.ts';
import type { Place } from '../../../shared/radio/place.ts';
import { nightSun } from '../../../shared/radio/sun.ts';

export interface SunNow {
  /** The figure to show, seconds: darkness left, or time until sunset; null where the sun does neither. */
  seconds: number | null;
  words: string;
  /** Of the night that is shown: the present one, or after sunrise the one that comes. */
  sunsetMs: number | null;
  sunriseMs: number | null;
  isDark: boolean;
  /** How far through the darkness we are, 0 to 1; null outside it. */
  share: number | null;
}

/**
 * Darkness as a person at the radio counts it. A night lasts until noon, but once the sun is up the coming sunset is
 * what matters.
 */
export function sunNow(nowMs: number, place: Place): SunNow {
  const index = nightIndexOf(nowMs, place.longitude);
  const tonight = nightSun(index, place);
  const isOver = tonight.sunriseMs !== null && nowMs >= tonight.sunriseMs;
  const { sunsetMs, sunriseMs, polar } = isOver ? nightSun(index + 1, place) : tonight;
  const shown = { sunsetMs, sunriseMs, isDark: false, share: null };
  if (polar !== null) {
    const words = polar === 'polar night' ? 'polar night: dark all day' : 'midnight sun: no darkness';
    return { ...shown, seconds: null, words, isDark: polar === 'polar night' };
  }
  if (sunsetMs !== null && nowMs < sunsetMs) {
    return { ...shown, seconds: (sunsetMs - nowMs) / 1000, words: 'until sunset' };
  }
  if (sunriseMs === null) return { ...shown, seconds: null, words: 'no sunrise tomorrow', isDark: true };
  return {
    ...shown,
    ...{ seconds: (sunriseMs - nowMs) / 1000, words: 'of darkness left', isDark: true },
    share: sunsetMs === null ? null : (nowMs - sunsetMs) / (sunriseMs - sunsetMs),
  };
}
