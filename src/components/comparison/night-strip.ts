import type { HourMark } from '../../../shared/contracts/comparison.ts';
import { nightIndexOfDate, nightStartMs, solarOffsetMs } from '../../../shared/radio/night.ts';
import { nightSun, sunAltitudeDeg } from '../../../shared/radio/sun.ts';

const hourMs = 3_600_000;

/** One night as it is drawn: hours 0 to 24 from local solar noon. */
export interface NightStrip {
  /** Places on the strip, hours after its start; null where the sun does not set or rise. */
  sunset: number | null;
  sunrise: number | null;
  /** Altitude of the sun every half hour, degrees. */
  sun: { at: number; altitudeDeg: number }[];
  /** UTC clock hour at the strip's start. */
  startUtcHour: number;
}

/** @param night YYYY-MM-DD; @param place degrees, east and north positive */
export function nightStrip(night: string, place: { latitude: number; longitude: number }): NightStrip {
  const index = nightIndexOfDate(night);
  const startMs = nightStartMs(index, place.longitude);
  const { sunsetMs, sunriseMs } = nightSun(index, place);
  const on = (timeMs: number | null) => (timeMs === null ? null : (timeMs - startMs) / hourMs);
  return {
    sunset: on(sunsetMs),
    sunrise: on(sunriseMs),
    sun: Array.from({ length: 49 }, (_, step) => ({
      at: step / 2,
      altitudeDeg: sunAltitudeDeg(startMs + (step / 2) * hourMs, place),
    })),
    startUtcHour: mod24(12 - solarOffsetMs(place.longitude) / hourMs),
  };
}

/** Where a mark lies on the strip, 0 to 24; null when it hangs on a sunset or sunrise that there is not. */
export function placeOfMark(mark: HourMark, strip: NightStrip): number | null {
  if (mark.reference === 'utc') return mod24(mark.hours - strip.startUtcHour);
  const origin = strip[mark.reference];
  return origin === null ? null : Math.min(24, Math.max(0, origin + mark.hours));
}

/** The mark at a place, in quarters of an hour of its reference. */
export function markAt(place: number, reference: HourMark['reference'], strip: NightStrip): HourMark {
  const quarter = (hours: number) => Math.round(hours * 4) / 4 + 0;
  if (reference === 'utc') return { reference, hours: mod24(quarter(place + strip.startUtcHour)) };
  const origin = strip[reference] ?? 12;
  return { reference, hours: Math.min(24, Math.max(-12, quarter(place - origin))) };
}

function mod24(hours: number): number {
  return ((hours % 24) + 24) % 24;
}
