import { nightIndexOf, nightStartMs } from '../../../shared/radio/night.ts';
import type { Place } from '../../../shared/radio/place.ts';
import { HORIZON_DEG, nightSun, sunAltitudeDeg } from '../../../shared/radio/sun.ts';
import type { TimeRange } from './time-scale.ts';
import { longestRangeMs, shortestRangeMs, tidyRange } from './time-scale.ts';

export const timePresets = [
  { key: 'tonight', word: 'Tonight' },
  { key: 'last-night', word: 'Last night' },
  { key: 'week', word: '7 nights' },
] as const;
export type TimePreset = (typeof timePresets)[number]['key'];

const hourMs = 3_600_000;

/** From an hour before sunset to an hour after sunrise; the whole night, noon to noon, where the sun does neither. */
function nightRange(index: number, place: Place): TimeRange {
  const { sunsetMs, sunriseMs } = nightSun(index, place);
  return {
    fromMs: sunsetMs === null ? nightStartMs(index, place.longitude) : sunsetMs - hourMs,
    toMs: sunriseMs === null ? nightStartMs(index + 1, place.longitude) : sunriseMs + hourMs,
  };
}

/**
 * The stretch of time that a preset shows. Tonight is the night that holds the present moment (noon to noon, local
 * solar time) and always has the present moment in it.
 */
export function presetRange(preset: TimePreset, nowMs: number, place: Place): TimeRange {
  const tonight = nightIndexOf(nowMs, place.longitude);
  if (preset === 'last-night') return tidyRange(nightRange(tonight - 1, place));
  const range = nightRange(preset === 'week' ? tonight - 6 : tonight, place);
  const toMs = preset === 'week' ? nightRange(tonight, place).toMs : range.toMs;
  return tidyRange({
    fromMs: Math.min(range.fromMs, nowMs - hourMs / 2),
    toMs: Math.max(toMs, nowMs + hourMs / 2),
  });
}

export type TimeChoice = { preset: TimePreset } | { range: TimeRange };

type Query = Record<string, string | null | (string | null)[] | undefined>;

/**
 * What the address says about time: `from` and `to` (UTC), or `show` with a preset. Anything unreadable, turned
 * round or beyond the permitted lengths is read as tonight.
 */
export function decodeTime(query: Query): TimeChoice {
  const { from, to, show } = query;
  if (typeof from === 'string' && typeof to === 'string') {
    const range = { fromMs: Date.parse(from), toMs: Date.parse(to) };
    const spanMs = range.toMs - range.fromMs;
    if (spanMs >= shortestRangeMs && spanMs <= longestRangeMs) return { range };
  }
  return { preset: timePresets.find(({ key }) => key === show)?.key ?? 'tonight' };
}

export function encodeTime(choice: TimeChoice): Record<string, string> {
  if ('preset' in choice) return choice.preset === 'tonight' ? {} : { show: choice.preset };
  const iso = (timeMs: number) => new Date(timeMs).toISOString().replace('.000Z', 'Z');
  return { from: iso(choice.range.fromMs), to: iso(choice.range.toMs) };
}

export interface SunTurn {
  kind: 'sunset' | 'sunrise';
  atMs: number;
}

export interface SunBackdrop {
  /** Stretches with the sun below the horizon, within the range. */
  dark: TimeRange[];
  turns: SunTurn[];
}

/** Darkness behind a range of time. */
export function sunBackdrop(range: TimeRange, place: Place): SunBackdrop {
  const first = nightIndexOf(range.fromMs, place.longitude);
  const last = nightIndexOf(range.toMs, place.longitude);
  const turns: SunTurn[] = [];
  for (let index = first; index <= last; index++) {
    const { sunsetMs, sunriseMs } = nightSun(index, place);
    if (sunsetMs !== null) turns.push({ kind: 'sunset', atMs: sunsetMs });
    if (sunriseMs !== null) turns.push({ kind: 'sunrise', atMs: sunriseMs });
  }
  const inside = turns.filter(({ atMs }) => atMs > range.fromMs && atMs < range.toMs);
  inside.sort((one, other) => one.atMs - other.atMs);
  const dark: TimeRange[] = [];
  let darkSinceMs = sunAltitudeDeg(range.fromMs, place) < HORIZON_DEG ? range.fromMs : null;
  for (const { kind, atMs } of inside) {
    if (kind === 'sunset') darkSinceMs ??= atMs;
    else if (darkSinceMs !== null) {
      dark.push({ fromMs: darkSinceMs, toMs: atMs });
      darkSinceMs = null;
    }
  }
  if (darkSinceMs !== null) dark.push({ fromMs: darkSinceMs, toMs: range.toMs });
  return { dark, turns: inside };
}
