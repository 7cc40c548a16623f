import { z } from 'zod';
import { callSignText, endpoint, id, instant, shortText, stationParams } from './common.ts';

export const feedHealth = z.object({
  state: z.enum(['connecting', 'receiving', 'silent', 'lost', 'off']),
  connectedAt: instant.nullable(),
  lastLineAt: instant.nullable(),
  linesLastMinute: z.number(),
  linesTotal: z.number(),
  storedTotal: z.number(),
  doubledTotal: z.number(),
  refusedTotal: z.number(),
  otherReceiverTotal: z.number(),
  lastError: z.string().nullable(),
  updatedAt: instant,
});
export const feed = z.object({
  id,
  name: z.string(),
  host: z.string(),
  port: z.number().int(),
  loginCall: z.string(),
  enabled: z.boolean(),
  health: feedHealth.nullable(),
});
export type Feed = z.infer<typeof feed>;
const portSentence = 'Give a port from 1 to 65535.';
const feedFields = z.object({
  name: shortText(40),
  host: shortText(253).regex(/^[A-Za-z0-9.:-]+$/, 'Give a host name or an IP address.'),
  port: z.number(portSentence).int(portSentence).min(1, portSentence).max(65535, portSentence),
  loginCall: callSignText,
  enabled: z.boolean(),
});
const feedParams = stationParams.extend({ feedId: id });
export const listFeeds = endpoint({
  method: 'GET',
  path: '/stations/:stationId/feeds',
  summary: 'Live feeds and their health',
  params: stationParams,
  reply: z.object({ items: z.array(feed) }),
});
export const addFeed = endpoint({
  method: 'POST',
  path: '/stations/:stationId/feeds',
  summary: 'Add a live feed; the worker connects within seconds',
  params: stationParams,
  body: feedFields.extend({ enabled: z.boolean().default(true) }),
  reply: feed,
  status: 201,
});
export const updateFeed = endpoint({
  method: 'PATCH',
  path: '/stations/:stationId/feeds/:feedId',
  summary: 'Change or switch off a live feed',
  params: feedParams,
  body: feedFields.partial(),
  reply: feed,
});
export const removeFeed = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/feeds/:feedId',
  summary: 'Remove a live feed; its spots stay',
  params: feedParams,
  status: 204,
});
export const downloadFeedRefusals = endpoint({
  method: 'GET',
  path: '/stations/:stationId/feeds/:feedId/refusals.csv',
  summary: 'Lines that the feed sent and the program refused, with the reason',
  params: feedParams,
  reply: z.string(),
  media: { reply: 'text/csv' },
});
