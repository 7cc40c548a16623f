import type { z } from 'zod';
import { instant } from '../../../shared/contracts/common.ts';
import { spotTag } from '../../../shared/contracts/spot.ts';
import type { SpotRow } from '../../../shared/contracts/spot.ts';
import { isBandMetres } from '../../../shared/radio/bands.ts';

export type SpotTag = z.infer<typeof spotTag>;

/** Which spots are asked for; null and an empty call ask for all. Times are ISO 8601 in UTC. */
export interface SpotFilter {
  from: string | null;
  to: string | null;
  bandMetres: number | null;
  receiverId: number | null;
  antennaId: number | null;
  call: string;
  tag: SpotTag | null;
}

export const everySpot: SpotFilter = {
  from: null,
  to: null,
  bandMetres: null,
  receiverId: null,
  antennaId: null,
  call: '',
  tag: null,
};

export const tagWords: Readonly<Record<SpotTag, string>> = {
  tagged: 'Tagged',
  guarded: 'Guard',
  untagged: 'No dwell',
};

type Query = Readonly<Record<string, unknown>>;

/** The filter that an address holds, and a sentence for each part of it that says nothing we know. */
export function decodeFilter(query: Query): { filter: SpotFilter; problems: string[] } {
  const problems: string[] = [];
  function read<T>(key: string, parse: (text: string) => T | null, accepted: string): T | null {
    const text = query[key];
    if (typeof text !== 'string' || text === '') return null;
    const value = parse(text);
    if (value === null)
      problems.push(`The address says "${key}=${text.slice(0, 60)}"; ${accepted}. It was left out.`);
    return value;
  }
  const time = (text: string) => instant.safeParse(text).data ?? null;
  const id = (text: string) => (/^[1-9]\d{0,9}$/.test(text) ? Number(text) : null);
  const filter: SpotFilter = {
    from: read('from', time, 'a time reads 2026-11-30T18:05:00Z'),
    to: read('to', time, 'a time reads 2026-11-30T18:05:00Z'),
    bandMetres: read(
      'band',
      (text) => (isBandMetres(Number(text)) ? Number(text) : null),
      'a band reads 160',
    ),
    receiverId: read('receiver', id, 'a receiver is given by its number'),
    antennaId: read('antenna', id, 'an antenna is given by its number'),
    call:
      read(
        'call',
        (text) => (text.length <= 20 ? text.trim().toUpperCase() : null),
        'a call has at most 20 characters',
      ) ?? '',
    tag: read('tag', (text) => spotTag.safeParse(text).data ?? null, 'a tag is tagged, guarded or untagged'),
  };
  return { filter, problems };
}

export function encodeFilter(filter: SpotFilter): Record<string, string> {
  const given: Record<string, string | number | null> = {
    from: filter.from,
    to: filter.to,
    band: filter.bandMetres,
    receiver: filter.receiverId,
    antenna: filter.antennaId,
    call: filter.call,
    tag: filter.tag,
  };
  return Object.fromEntries(
    Object.entries(given).flatMap(([key, value]) =>
      value === null || value === '' ? [] : [[key, String(value)]],
    ),
  );
}

/** The same as the server wants it. */
export function filterQuery(filter: SpotFilter) {
  return {
    from: filter.from ?? undefined,
    to: filter.to ?? undefined,
    bandMetres: filter.bandMetres ?? undefined,
    receiverId: filter.receiverId ?? undefined,
    antennaId: filter.antennaId ?? undefined,
    call: filter.call || undefined,
    tag: filter.tag ?? undefined,
  };
}

/** An instant as it is typed on this page: "2026-11-30 18:05", always UTC; seconds only where there are any. */
export function toTimeInput(at: string | null): string {
  if (at === null) return '';
  const iso = new Date(at).toISOString();
  return `${iso.slice(0, 10)} ${iso.slice(11, iso.slice(17, 19) === '00' ? 16 : 19)}`;
}

/** Undefined where the text is no time that we can read; null where it is empty. */
export function fromTimeInput(text: string): string | null | undefined {
  if (text.trim() === '') return null;
  const parts = /^\s*(\d{4}-\d{2}-\d{2})(?:[T ]+(\d{2}:\d{2})(:\d{2})?)?\s*Z?\s*$/i.exec(text);
  if (parts === null) return undefined;
  const iso = `${parts[1]}T${parts[2] ?? '00:00'}${parts[3] ?? ':00'}Z`;
  // Date rolls the 31st of a short month over into the next one.
  const isReal =
    !Number.isNaN(Date.parse(iso)) && new Date(iso).toISOString().slice(0, 19) === iso.slice(0, 19);
  return isReal ? iso : undefined;
}

/** Tells rows apart: what the store of spots is unique by. */
export function spotKey({ heardAt, receiverId, call, freqKhz, mode }: SpotRow): string {
  return `${heardAt} ${receiverId} ${call} ${freqKhz} ${mode}`;
}

const dayMs = 86_400_000;

/** What the map shows: the filter's own time, or the day up to the newest spot where it names none. */
export function mapRange(
  filter: Pick<SpotFilter, 'from' | 'to'>,
  newest: string | null,
  nowMs: number,
): { from: string; to: string } {
  const write = (ms: number) => new Date(ms).toISOString();
  if (filter.from !== null) return { from: filter.from, to: filter.to ?? write(nowMs) };
  // A second more: the newest spot itself belongs to it.
  const to = filter.to ?? (newest === null ? write(nowMs) : write(Date.parse(newest) + 1000));
  return { from: write(Date.parse(to) - dayMs), to };
}
