import { hostname } from 'node:os';
import { randomBytes } from 'node:crypto';
import { z } from 'zod';

const seconds = (fallback: number) => z.coerce.number().positive().max(86_400).default(fallback);

const environment = z.object({
  DATABASE_URL: z.string().min(1, 'DATABASE_URL is missing: give a PostgreSQL address.'),
  DATABASE_POOL: z.coerce.number().int().min(4).max(200).default(10),
  LOG_LEVEL: z.enum(['fatal', 'error', 'warn', 'info', 'debug', 'silent']).default('info'),
  FEED_IDLE_SECONDS: seconds(300),
  FEED_RETRY_SECONDS: seconds(1),
  JOB_CONCURRENCY: z.coerce.number().int().min(1).max(16).default(2),
});

export interface WorkerConfig {
  databaseUrl: string;
  /** At least 4: feeds, jobs, units and timed jobs each need one at the same time. */
  databasePool: number;
  logLevel: string;
  /** A feed that sends nothing for this long is taken for lost, although its connection stands. */
  feedIdleSeconds: number;
  /** Pause before a lost feed is called again, at first. */
  feedRetrySeconds: number;
  jobConcurrency: number;
  /** Unique among all workers: machine, process, and chance, since process numbers come again. */
  workerName: string;
}

/** Reads the environment once; says in a sentence which variable is wrong. Throws Error. */
export function readWorkerConfig(env: NodeJS.ProcessEnv): WorkerConfig {
  const parsed = environment.safeParse(env);
  if (!parsed.success) {
    const sentences = parsed.error.issues.map((issue) => `${issue.path.join('.')}: ${issue.message}`);
    throw new Error(`The environment is not complete. ${sentences.join(' ')}`);
  }
  const e = parsed.data;
  return {
    databaseUrl: e.DATABASE_URL,
    databasePool: e.DATABASE_POOL,
    logLevel: e.LOG_LEVEL,
    feedIdleSeconds: e.FEED_IDLE_SECONDS,
    feedRetrySeconds: e.FEED_RETRY_SECONDS,
    jobConcurrency: e.JOB_CONCURRENCY,
    workerName: `${hostname()}-${process.pid}-${randomBytes(4).toString('hex')}`,
  };
}
