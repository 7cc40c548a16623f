import { InvalidRequest } from './errors.ts';

/** Place in a list ordered by a descending number: the last one seen. Opaque to callers. */
export function numberCursor(after: string | undefined): number | null {
  if (after === undefined) return null;
  const value = Number(after);
  if (!Number.isSafeInteger(value) || value < 0) {
    throw new InvalidRequest('Some fields have to change.', [
      { path: 'query.after', message: 'Pass the `next` of the page before, unchanged.' },
    ]);
  }
  return value;
}

/** Reads one row more than asked for; whether it came tells if there is a next page. */
export function pageOf<T>(
  rows: T[],
  limit: number,
  cursorOf: (row: T) => string,
): { items: T[]; next: string | null } {
  const items = rows.slice(0, limit);
  const last = items.at(-1);
  return { items, next: rows.length > limit && last !== undefined ? cursorOf(last) : null };
}
