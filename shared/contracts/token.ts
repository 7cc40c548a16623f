import { z } from 'zod';
import { endpoint, instant, numberWithin, shortText, stationParams, uuid } from './common.ts';
import { tokenScope } from './permission.ts';

export const apiToken = z.object({
  id: uuid,
  name: z.string(),
  scopes: z.array(tokenScope),
  createdAt: instant,
  expiresAt: instant,
  lastUsedAt: instant.nullable(),
  revokedAt: instant.nullable(),
});
export const listTokens = endpoint({
  method: 'GET',
  path: '/stations/:stationId/tokens',
  summary: 'API tokens of the station, never their secrets',
  params: stationParams,
  reply: z.object({ items: z.array(apiToken) }),
});
export const makeToken = endpoint({
  method: 'POST',
  path: '/stations/:stationId/tokens',
  summary: 'Make an API token; the secret is shown this once',
  params: stationParams,
  body: z.object({
    name: shortText(60),
    scopes: z.array(tokenScope).min(1, 'Choose at least one scope.'),
    days: numberWithin(1, 730).int('Give whole days.').default(365),
  }),
  reply: z.object({ token: apiToken, secret: z.string() }),
  status: 201,
});
export const revokeToken = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/tokens/:tokenId',
  summary: 'Revoke an API token at once',
  params: stationParams.extend({ tokenId: uuid }),
  status: 204,
});
