/** Times as a person types them on the Switching page: always UTC. */

const dayMs = 86_400_000;

/** "2026-11-30 18:05:00": how a time stands in a field. Milliseconds are not shown. */
export function utcText(timeMs: number): string {
  return new Date(timeMs).toISOString().slice(0, 19).replace('T', ' ');
}

export const utcTextHint = 'UTC, such as 2026-11-30 18:05:00, or 18:05 alone';

const full = /^(\d{4})-(\d{2})-(\d{2})[ T]+(\d{1,2}):(\d{2})(?::(\d{2}))?$/;
const clockOnly = /^(\d{1,2}):(\d{2})(?::(\d{2}))?$/;

/**
 * The instant that a text names, ms since 1970; null when it names none. A clock time alone is taken on the day that
 * brings it nearest to `nearMs`, or, with `notAfterMs`, on the last day that does not bring it past that.
 */
export function parseUtc(text: string, nearMs: number, notAfterMs?: number): number | null {
  const trimmed = text.trim().replace(/\s*(Z|UTC)$/i, '');
  const dated = full.exec(trimmed);
  if (dated) {
    const [year, month, day, hour, minute, second] = dated.slice(1).map((part) => Number(part ?? 0));
    const timeMs = Date.UTC(year!, month! - 1, day!, hour!, minute!, second!);
    // 30 February would roll on into March, 25:00 into the next day.
    const [y, m, d, h, min, s] = utcText(timeMs).split(/[- :]/).map(Number);
    const same = y === year && m === month && d === day && h === hour && min === minute && s === second;
    return same ? timeMs : null;
  }
  const clock = clockOnly.exec(trimmed);
  if (!clock) return null;
  const [hour, minute, second] = clock.slice(1).map((part) => Number(part ?? 0));
  if (hour! > 23 || minute! > 59 || second! > 59) return null;
  const ofDayMs = (hour! * 3600 + minute! * 60 + second!) * 1000;
  if (notAfterMs !== undefined) return ofDayMs + Math.floor((notAfterMs - ofDayMs) / dayMs) * dayMs;
  return ofDayMs + Math.round((nearMs - ofDayMs) / dayMs) * dayMs;
}
