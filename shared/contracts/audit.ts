import { z } from 'zod';
import { endpoint, instant, stationParams } from './common.ts';

export const auditEntry = z.object({
  id: z.number(),
  at: instant,
  who: z.string(),
  action: z.string(),
  target: z.string(),
  detail: z.record(z.string(), z.unknown()),
});
export const listAudit = endpoint({
  method: 'GET',
  path: '/stations/:stationId/audit',
  summary: 'Who did what, newest first',
  params: stationParams,
  query: z.object({
    after: z.string().max(40).optional(),
    limit: z.coerce.number().int().min(1).max(200).default(50),
  }),
  reply: z.object({ items: z.array(auditEntry), next: z.string().nullable() }),
});
