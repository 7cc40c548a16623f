import type { Refusal } from '../radio/place.ts';

const minuteMs = 60_000;
/** Clocks are put forward and back on quarter hours only. */
const stepMs = 15 * minuteMs;
const dayMs = 86_400_000;
const longestCache = 50_000;

/** A wall clock's reading (as milliseconds, as if it were UTC) to the instant it stands for. */
export type WallClock = (wallMs: number) => number | Refusal;

/** null for a name that is no time zone. */
export function createWallClock(zone: string): WallClock | null {
  if (/^(utc|etc\/utc|gmt|z)$/i.test(zone.trim())) return (wallMs) => wallMs;
  const readZone = zoneReader(zone.trim());
  if (readZone === null) return null;
  const offsets = new Map<number, number | 'gap' | 'overlap'>();
  let lastStep = Number.NaN;
  let lastOffset: number | 'gap' | 'overlap' = 0;

  function offsetAt(step: number): number | 'gap' | 'overlap' {
    const known = offsets.get(step);
    if (known !== undefined) return known;
    if (offsets.size >= longestCache) offsets.clear();
    const found = findOffset(step * stepMs, readZone!);
    offsets.set(step, found);
    return found;
  }

  return (wallMs) => {
    const step = Math.floor(wallMs / stepMs);
    if (step !== lastStep) {
      lastStep = step;
      lastOffset = offsetAt(step);
    }
    if (typeof lastOffset === 'number') return wallMs - lastOffset;
    const wall = `"${new Date(wallMs).toISOString().slice(0, 16).replace('T', ' ')}"`;
    return {
      reason:
        lastOffset === 'gap'
          ? `The time ${wall} does not exist in the zone "${zone}": its clocks were put forward then. Give UTC or an offset such as +01:00.`
          : `The time ${wall} came twice in the zone "${zone}": its clocks were put back then. Give UTC or an offset such as +01:00.`,
    };
  };
}

/** The one offset that the zone had when its clocks showed this, if there is one and only one. */
function findOffset(wallMs: number, readZone: (instantMs: number) => number): number | 'gap' | 'overlap' {
  // No zone is more than a day from UTC: the offsets a day before and after are all that can apply.
  const candidates = new Set([
    readZone(wallMs - dayMs) - (wallMs - dayMs),
    readZone(wallMs + dayMs) - (wallMs + dayMs),
  ]);
  const fitting = [...candidates].filter((offset) => readZone(wallMs - offset) === wallMs);
  return fitting.length === 0 ? 'gap' : fitting.length === 1 ? fitting[0]! : 'overlap';
}

/** Instant -> what the zone's wall clock shows, as if it were UTC. */
function zoneReader(zone: string): ((instantMs: number) => number) | null {
  let format: Intl.DateTimeFormat;
  try {
    format = new Intl.DateTimeFormat('en-US', {
      timeZone: zone,
      calendar: 'gregory',
      numberingSystem: 'latn',
      hourCycle: 'h23',
      year: 'numeric',
      month: 'numeric',
      day: 'numeric',
      hour: 'numeric',
      minute: 'numeric',
      second: 'numeric',
    });
  } catch {
    return null;
  }
  return (instantMs) => {
    const parts = new Map(format.formatToParts(instantMs).map(({ type, value }) => [type, Number(value)]));
    const part = (name: Intl.DateTimeFormatPartTypes) => parts.get(name) ?? 0;
    return Date.UTC(
      part('year'),
      part('month') - 1,
      part('day'),
      part('hour'),
      part('minute'),
      part('second'),
    );
  };
}
