import { z } from 'zod';
import { endpoint, id, stationParams } from './common.ts';
import { livePair } from './tonight.ts';

/** What server-sent events carry; PostgreSQL's NOTIFY carries the same, with the station's id beside it. */
export const stationEvent = z.discriminatedUnion('type', [
  z.object({ type: z.literal('spots'), stored: z.number().int() }),
  z.object({ type: z.literal('pairs'), pairs: z.array(livePair).max(20) }),
  z.object({ type: z.literal('switch'), receiverIds: z.array(id) }),
  z.object({ type: z.literal('units'), nights: z.array(z.iso.date()).max(400) }),
  z.object({ type: z.literal('import'), importId: id }),
  z.object({ type: z.literal('job'), jobId: z.number().int() }),
  z.object({ type: z.literal('feed'), feedId: id }),
  z.object({ type: z.literal('station') }),
]);
export type StationEvent = z.infer<typeof stationEvent>;

/** One PostgreSQL channel for all: the payload names the station. */
export const eventChannel = 'whichwire_event';
export const notification = z.object({ stationId: id, event: stationEvent });

/**
 * Read with fetch, not EventSource: the access token travels in the usual header and never in an address.
 * Each event is one `data:` line of JSON; a comment line every 20 seconds keeps the connection known alive.
 */
export const eventStream = endpoint({
  method: 'GET',
  path: '/stations/:stationId/events',
  summary: 'Server-sent events of one station',
  params: stationParams,
  reply: stationEvent,
  media: { reply: 'text/event-stream' },
});
