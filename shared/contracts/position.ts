import { z } from 'zod';
import { endpoint, id, locatorText, numberWithin, stationParams } from './common.ts';

export const positionOverride = z.object({
  id,
  matches: z.enum(['call', 'prefix']),
  pattern: z.string(),
  locator: z.string(),
  radiusKm: z.number(),
});
export const listPositionOverrides = endpoint({
  method: 'GET',
  path: '/stations/:stationId/positions',
  summary: "The station's own corrections of where calls are",
  params: stationParams,
  reply: z.object({ items: z.array(positionOverride) }),
});
export const addPositionOverride = endpoint({
  method: 'POST',
  path: '/stations/:stationId/positions',
  summary: 'Say where a call, or all calls with a prefix, really are',
  params: stationParams,
  body: z.object({
    matches: z.enum(['call', 'prefix']),
    pattern: z
      .string()
      .trim()
      .toUpperCase()
      .regex(/^[A-Z0-9/]{1,16}$/, 'Give a call sign or a prefix of letters and digits.'),
    locator: locatorText,
    radiusKm: numberWithin(0, 10_000).default(50),
  }),
  reply: positionOverride,
  status: 201,
});
export const removePositionOverride = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/positions/:positionId',
  summary: 'Withdraw a position correction',
  params: stationParams.extend({ positionId: id }),
  status: 204,
});
