import { z } from 'zod';
import { endpoint, instant, longId, stationParams } from './common.ts';

export const jobState = z.enum(['queued', 'running', 'done', 'dead', 'cancelled']);
export const job = z.object({
  id: longId,
  kind: z.string(),
  state: jobState,
  attempts: z.number().int(),
  progress: z.object({ done: z.number(), total: z.number(), secondsLeft: z.number().nullable() }).nullable(),
  error: z.string().nullable(),
  createdAt: instant,
  finishedAt: instant.nullable(),
});
export type Job = z.infer<typeof job>;

export const listJobs = endpoint({
  method: 'GET',
  path: '/stations/:stationId/jobs',
  summary: 'Running, waiting and failed work',
  params: stationParams,
  reply: z.object({ items: z.array(job) }),
});
export const readJob = endpoint({
  method: 'GET',
  path: '/stations/:stationId/jobs/:jobId',
  summary: 'One piece of work and how far it is',
  params: stationParams.extend({ jobId: longId }),
  reply: job,
});
export const cancelJob = endpoint({
  method: 'POST',
  path: '/stations/:stationId/jobs/:jobId/cancel',
  summary: 'Stop a piece of work at its next step',
  params: stationParams.extend({ jobId: longId }),
  reply: job,
});
export const retryJob = endpoint({
  method: 'POST',
  path: '/stations/:stationId/jobs/:jobId/retry',
  summary: 'Try a failed piece of work again',
  params: stationParams.extend({ jobId: longId }),
  reply: job,
});
