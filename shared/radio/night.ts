/**
 * Nights: from mean local solar noon to the next. The date of a night is the UTC date of
 * (UTC + longitude / 15 h - 12 h), so that one evening and the following early morning share it.
 *
 * Mean solar time is used on purpose: it is linear, so the database can compute the same index with
 * the same integer arithmetic. The true sun is at most 17 minutes away from it, at noon, when no
 * low-band evidence is gathered.
 */

const dayMs = 86_400_000;
const noonMs = 43_200_000;
const msPerDegree = 240_000;

/** Mean solar time minus UTC in whole milliseconds; rounded once, so that starts and indices agree exactly. */
export function solarOffsetMs(longitudeDeg: number): number {
  return Math.round(longitudeDeg * msPerDegree);
}

/**
 * The night of an instant.
 * @param timeMs milliseconds since 1970-01-01T00:00Z
 * @param longitudeDeg the station's longitude, east positive
 * @returns whole days since 1970-01-01 of the night's date; throws a RangeError when either is not finite
 */
export function nightIndexOf(timeMs: number, longitudeDeg: number): number {
  const index = Math.floor((timeMs + solarOffsetMs(longitudeDeg) - noonMs) / dayMs);
  if (!Number.isFinite(index)) {
    throw new RangeError(
      `timeMs and longitudeDeg must be finite numbers, were ${timeMs} and ${longitudeDeg}`,
    );
  }
  return index;
}

/** 'YYYY-MM-DD' of a night: the date on which its evening falls in local solar time. */
export function nightDate(index: number): string {
  return new Date(index * dayMs).toISOString().slice(0, 10);
}

/** The night index of a 'YYYY-MM-DD' date. Throws a RangeError when the text is no such date. */
export function nightIndexOfDate(date: string): number {
  const timeMs = /^\d{4}-\d{2}-\d{2}$/.test(date) ? Date.parse(`${date}T00:00:00Z`) : Number.NaN;
  // Date.parse moves 30 February on to March in some engines: the round trip refuses that.
  if (Number.isNaN(timeMs) || new Date(timeMs).toISOString().slice(0, 10) !== date) {
    throw new RangeError(`date must be a calendar date written YYYY-MM-DD, was "${date}"`);
  }
  return timeMs / dayMs;
}

/** First millisecond of a night (it belongs to the night). */
export function nightStartMs(index: number, longitudeDeg: number): number {
  return index * dayMs + noonMs - solarOffsetMs(longitudeDeg);
}

/** First millisecond after a night: the start of the next. */
export function nightEndMs(index: number, longitudeDeg: number): number {
  return nightStartMs(index + 1, longitudeDeg);
}
