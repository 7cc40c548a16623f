import cron from 'node-cron';
import type { DataSource } from 'typeorm';
import type { Logger } from '../../server/platform/logger.ts';

export interface TimedJob {
  /** Unique; the same in every worker. */
  name: string;
  /** Cron expression, UTC. */
  schedule: string;
  run: () => Promise<void>;
}

export interface TimedJobsOptions {
  dataSource: DataSource;
  logger: Logger;
  workerName: string;
  jobs: readonly TimedJob[];
}

const isoLength = '2026-01-05T03:00:00.000Z'.length;

/**
 * Decides which worker runs a tick: the first that inserts its row. A tick whose worker dies over it is
 * not run again; what timed jobs do must therefore be made good by the next tick.
 */
export function createRunCoordinator(dataSource: DataSource, workerName: string) {
  return {
    /** `key` is `<name>:<ISO time of the tick>`, as node-cron gives it. */
    async shouldRun(key: string): Promise<boolean> {
      // A name may hold colons as well; an ISO time is always of one length.
      const tick = key.slice(-isoLength);
      const name = key.slice(0, -isoLength - 1);
      const rows: unknown[] = await dataSource.query(
        `INSERT INTO timed_run (name, tick, claimed_by) VALUES ($1, $2, $3)
         ON CONFLICT (name, tick) DO NOTHING RETURNING name`,
        [name, new Date(tick), workerName],
      );
      return rows.length === 1;
    },
  };
}

export function startTimedJobs(options: TimedJobsOptions): { stop: () => Promise<void> } {
  const { dataSource, logger, workerName, jobs } = options;
  const runCoordinator = createRunCoordinator(dataSource, workerName);
  const quiet = () => undefined;
  const underWay = new Set<Promise<void>>();
  const tasks = jobs.map((job) =>
    cron.schedule(
      job.schedule,
      async () => {
        const run = job
          .run()
          .catch((error: unknown) => logger.error({ err: error, timedJob: job.name }, 'a timed job failed'))
          .finally(() => underWay.delete(run));
        underWay.add(run);
        await run;
      },
      {
        name: job.name,
        timezone: 'UTC',
        noOverlap: true,
        distributed: true,
        runCoordinator,
        logger: {
          info: quiet,
          debug: quiet,
          warn: (message) => logger.warn({ timedJob: job.name }, message),
          error: (message, error) =>
            logger.error(
              { err: error ?? message, timedJob: job.name },
              'a timed job could not be run at its time',
            ),
        },
      },
    ),
  );
  return {
    async stop() {
      for (const task of tasks) await task.destroy();
      await Promise.all(underWay);
    },
  };
}
