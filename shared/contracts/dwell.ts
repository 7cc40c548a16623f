import { z } from 'zod';
import { day, endpoint, id, instant, longId, stationParams, uuid } from './common.ts';

export const dwell = z.object({
  id: longId,
  receiverId: id,
  antennaId: id,
  startsAt: instant,
  /** null: still on. */
  endsAt: instant.nullable(),
  source: z.enum(['hand', 'import', 'token', 'plan']),
  note: z.string(),
});
export type Dwell = z.infer<typeof dwell>;

const note = z.string().trim().max(400, 'Use at most 400 characters.');
export const newDwell = z
  .object({
    receiverId: id,
    antennaId: id,
    startsAt: instant,
    endsAt: instant.nullable(),
    note: note.default(''),
  })
  // Compared as times: as text, 18:05:00.5Z would come before 18:05:00Z.
  .refine((d) => d.endsAt === null || Date.parse(d.endsAt) > Date.parse(d.startsAt), {
    path: ['endsAt'],
    message: 'The end must come after the start.',
  });
export type NewDwell = z.infer<typeof newDwell>;

/**
 * One correction of the switch log. A list of them is previewed, and applied, as a whole or not at all.
 * They are taken in order; whether dwells overlap is asked of the outcome only, so that two dwells can trade
 * places. After a split `dwellId` names the earlier part: split from the latest to the earliest.
 */
export const dwellChange = z.discriminatedUnion('action', [
  z.object({ action: z.literal('add'), dwell: newDwell }),
  z.object({
    action: z.literal('edit'),
    dwellId: longId,
    antennaId: id.optional(),
    startsAt: instant.optional(),
    endsAt: instant.nullable().optional(),
    note: note.optional(),
  }),
  z.object({
    action: z.literal('split'),
    dwellId: longId,
    at: instant,
    /** What the later part was on. */
    antennaId: id,
  }),
  z.object({ action: z.literal('close'), dwellId: longId, at: instant }),
  z.object({ action: z.literal('delete'), dwellId: longId }),
]);
export type DwellChange = z.infer<typeof dwellChange>;
export const dwellChanges = z.object({ changes: z.array(dwellChange).min(1).max(500) });

/** What a change would do, counted before it is done; the counts hold exactly when it is applied at once. */
export const dwellPreview = z.object({
  /** Spots whose antenna changes (from one to another, to none or from none). */
  spotsChangingAntenna: z.number().int(),
  spotsGainingAntenna: z.number().int(),
  spotsLosingAntenna: z.number().int(),
  /** Spots that move into or out of a guard while their antenna stays. */
  spotsChangingGuard: z.number().int(),
  /** Blocks of the standing rules, within the time of the station's spots, that the change reaches. */
  blocksTouched: z.number().int(),
  nightsTouched: z.array(day),
  /**
   * What is accepted and may still be a slip: an antenna outside its dates of service. What was connected
   * was connected, and whoever corrects the log cannot always change the antenna's dates.
   */
  warnings: z.array(z.string()),
});
export type DwellPreview = z.infer<typeof dwellPreview>;

export const listDwells = endpoint({
  method: 'GET',
  path: '/stations/:stationId/dwells',
  summary: 'Dwells that touch a stretch of time, oldest first',
  params: stationParams,
  query: z.object({ from: instant, to: instant, receiverId: id.optional() }),
  reply: z.object({ items: z.array(dwell), truncated: z.boolean() }),
});
export const listNowOn = endpoint({
  method: 'GET',
  path: '/stations/:stationId/now-on',
  summary: 'The antenna that each receiver is on now',
  params: stationParams,
  reply: z.object({ items: z.array(z.object({ receiverId: id, dwell: dwell.nullable() })) }),
});
/** No text is taken for a number here: an antenna may be called 80. */
const idNumber = z.number().int().min(1).max(2_147_483_647);
/** "Now on": closes the receiver's open dwell and opens the next one, in one transaction. */
export const switchReceiver = endpoint({
  method: 'POST',
  path: '/stations/:stationId/switch',
  summary: 'Log that a receiver is now on an antenna (by hand, or by a switch controller with an API token)',
  params: stationParams,
  body: z.object({
    /** Receiver by id (a number) or by call sign (text, any letter case). */
    receiver: z.union([idNumber, z.string().trim().min(1).max(20)]),
    /** Antenna by id (a number) or by name (text, any letter case); null: disconnected. */
    antenna: z.union([idNumber, z.string().trim().min(1).max(40)]).nullable(),
    /** Now unless given; not before what the log holds already, and at most a minute ahead. */
    at: instant.optional(),
  }),
  reply: z.object({
    /** What the receiver is on after the call; null: disconnected. */
    dwell: dwell.nullable(),
    /** false: it was on this antenna already, and nothing was logged. */
    changed: z.boolean(),
    /** The switch is logged whatever the antenna's dates of service say; then this says so. */
    warning: z.string().nullable(),
  }),
});
export const previewDwellChanges = endpoint({
  method: 'POST',
  path: '/stations/:stationId/dwells/preview',
  summary: 'How many spots a correction of the switch log would touch',
  params: stationParams,
  body: dwellChanges,
  reply: dwellPreview,
});
export const applyDwellChanges = endpoint({
  method: 'POST',
  path: '/stations/:stationId/dwells/changes',
  summary: 'Apply corrections to the switch log, all or none',
  params: stationParams,
  body: dwellChanges,
  reply: z.object({ batchId: uuid, dwells: z.array(dwell), preview: dwellPreview }),
});
export const dwellHistoryEntry = z.object({
  batchId: uuid,
  at: instant,
  who: z.string(),
  action: z.string(),
  summary: z.string(),
  dwellCount: z.number().int(),
  canUndo: z.boolean(),
});
export const listDwellHistory = endpoint({
  method: 'GET',
  path: '/stations/:stationId/dwells/history',
  summary: 'Changes of the switch log, newest first',
  params: stationParams,
  query: z.object({
    after: z.string().max(40).optional(),
    limit: z.coerce.number().int().min(1).max(200).default(50),
  }),
  reply: z.object({ items: z.array(dwellHistoryEntry), next: z.string().nullable() }),
});
export const undoDwellChange = endpoint({
  method: 'POST',
  path: '/stations/:stationId/dwells/history/:batchId/undo',
  summary: 'Take a change back, unless later changes touch the same dwells or their time',
  params: stationParams.extend({ batchId: uuid }),
  reply: z.object({ batchId: uuid, dwells: z.array(dwell), preview: dwellPreview }),
});
export const exportDwells = endpoint({
  method: 'GET',
  path: '/stations/:stationId/dwells.csv',
  summary: 'The switch log as CSV (receiver, antenna, starts_at, ends_at, note)',
  params: stationParams,
  query: z.object({ from: instant.optional(), to: instant.optional() }),
  reply: z.string(),
  media: { reply: 'text/csv' },
});
