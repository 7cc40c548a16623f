import { z } from 'zod';
import type { ZodType } from 'zod';
import type { Endpoint } from './endpoint.ts';

/** Whole numbers that PostgreSQL's integer holds; ids in paths arrive as text. */
export const id = z.coerce.number().int().min(1).max(2_147_483_647);
/** Ids of bigint columns (dwells, jobs), which stay far below 2^53. */
export const longId = z.coerce.number().int().min(1).max(Number.MAX_SAFE_INTEGER);
export const uuid = z.uuid();

/** An instant: ISO 8601 in UTC, ending in Z. */
export const instant = z.iso.datetime({ error: 'Give a UTC time such as 2026-11-30T18:05:00Z.' });
/** A night's date (noon to noon, local solar time) or a calendar day. */
export const day = z.iso.date({ error: 'Give a date such as 2026-11-30.' });

export const noParams = z.object({});
export const noQuery = z.object({});
export const noBody = z.undefined();
export const noReply = z.undefined();

export const stationParams = z.object({ stationId: id });
export type StationParams = z.infer<typeof stationParams>;

/** Text that a person types: trimmed, never only blanks. */
export const shortText = (max = 80) =>
  z.string().trim().min(1, 'This cannot be empty.').max(max, `Use at most ${max} characters.`);
export const longText = z.string().max(4000, 'Use at most 4000 characters.');

/** Receiver and station calls: letters and digits with at least one of each, no portable marks. */
export const callSignText = z
  .string()
  .trim()
  .toUpperCase()
  .regex(/^(?=.*[0-9])(?=.*[A-Z])[A-Z0-9]{3,12}$/, 'Give a call sign of letters and digits such as EI7QSB.');

export const locatorText = z
  .string()
  .trim()
  .regex(/^[A-R]{2}([0-9]{2}([A-X]{2}([0-9]{2})?)?)?$/i, 'Give a Maidenhead locator such as IO53 or IO53kr.');

/** A number in a range, with one sentence for every way to miss it. */
export const numberWithin = (from: number, to: number) => {
  const sentence = `Give a number from ${from} to ${to}.`;
  return z.number(sentence).min(from, sentence).max(to, sentence);
};

/** A list read in pages: pass `next` of one page as `after` of the following one. */
export const page = <T extends ZodType>(item: T) =>
  z.object({ items: z.array(item), next: z.string().nullable() });
export const pageQuery = z.object({
  after: z.string().max(200).optional(),
  limit: z.coerce.number().int().min(1).max(500).default(100),
});

/** RFC 9457 problem; `errors` names the fields or lines that have to change. */
export const problem = z.object({
  type: z.string(),
  title: z.string(),
  status: z.number().int(),
  detail: z.string().optional(),
  code: z.string(),
  errors: z.array(z.object({ path: z.string(), message: z.string() })).optional(),
  requestId: z.string().optional(),
});
export type Problem = z.infer<typeof problem>;

/** Fills what an endpoint leaves out, so that each contract states only what is special about it. */
export function endpoint<
  Params extends ZodType = typeof noParams,
  Query extends ZodType = typeof noQuery,
  Body extends ZodType = typeof noBody,
  Reply extends ZodType = typeof noReply,
>(
  e: Pick<Endpoint, 'method' | 'path' | 'summary' | 'status' | 'media'> & {
    params?: Params;
    query?: Query;
    body?: Body;
    reply?: Reply;
  },
): Endpoint<Params, Query, Body, Reply> {
  return {
    ...e,
    params: e.params ?? (noParams as unknown as Params),
    query: e.query ?? (noQuery as unknown as Query),
    body: e.body ?? (noBody as unknown as Body),
    reply: e.reply ?? (noReply as unknown as Reply),
  };
}
