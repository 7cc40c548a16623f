import type { HourRange } from '../../../shared/contracts/comparison.ts';
import type { TonightAnswer } from '../../../shared/contracts/tonight.ts';
import { nightIndexOf } from '../../../shared/radio/night.ts';
import type { Place } from '../../../shared/radio/place.ts';
import { HORIZON_DEG, nightSun, sunAltitudeDeg } from '../../../shared/radio/sun.ts';

const hourMs = 3_600_000;
const dayMs = 24 * hourMs;

export interface AdvisedHour {
  about: TonightAnswer['about'];
  range: HourRange;
}

/** What the advice of an instant is about: the hour around it, or by day the evening to come. */
export function advisedHour(atMs: number, place: Place): AdvisedHour {
  const isDay = sunAltitudeDeg(atMs, place) >= HORIZON_DEG;
  const { sunsetMs } = nightSun(nightIndexOf(atMs + dayMs / 2, place.longitude), place);
  if (!isDay || sunsetMs === null) return { about: 'this hour', range: hourAround(atMs, place) };
  return {
    about: 'the first two hours after sunset',
    range: { from: { reference: 'sunset', hours: 0 }, to: { reference: 'sunset', hours: 2 } },
  };
}

/**
 * The hour around an instant, one hour either side, counted from the nearer of sunset and sunrise: the same
 * propagation comes a little earlier or later each night. Where the sun does neither, the UTC clock serves.
 */
export function hourAround(atMs: number, place: Place): HourRange {
  const sun = nightSun(nightIndexOf(atMs, place.longitude), place);
  const marks = [
    { reference: 'sunset' as const, atMs: sun.sunsetMs },
    { reference: 'sunrise' as const, atMs: sun.sunriseMs },
  ].flatMap((mark) => (mark.atMs === null ? [] : [{ ...mark, atMs: mark.atMs }]));
  const nearest = marks.sort((a, b) => Math.abs(atMs - a.atMs) - Math.abs(atMs - b.atMs))[0];
  if (!nearest) {
    const hours = (atMs / hourMs) % 24;
    return {
      from: { reference: 'utc', hours: (hours + 23) % 24 },
      to: { reference: 'utc', hours: (hours + 1) % 24 },
    };
  }
  const hours = (atMs - nearest.atMs) / hourMs;
  const clamp = (value: number) => Math.max(-12, Math.min(24, value));
  return {
    from: { reference: nearest.reference, hours: clamp(hours - 1) },
    to: { reference: nearest.reference, hours: clamp(hours + 1) },
  };
}
