import { z } from 'zod';
import { endpoint } from './common.ts';

export const live = endpoint({
  method: 'GET',
  path: '/health/live',
  summary: 'The process answers',
  reply: z.object({ status: z.literal('live') }),
});
export const ready = endpoint({
  method: 'GET',
  path: '/health/ready',
  summary: 'The process and its database answer',
  reply: z.object({ status: z.literal('ready') }),
});
