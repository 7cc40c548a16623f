import { setTimeout as delay } from 'node:timers/promises';
import type { DataSource } from 'typeorm';
import type { JobKind } from '../../server/platform/job-queue.ts';
import type { Logger } from '../../server/platform/logger.ts';
import { JobRefused, JobStopped, type JobHandler, type JobHandlers } from './job-handler.ts';
import { createProgressWriter } from './job-progress.ts';
import { createJobStore, type Claim, type JobEnd } from './job-store.ts';

export interface JobRunnerOptions {
  dataSource: DataSource;
  logger: Logger;
  handlers: JobHandlers;
  /** Unique among all workers. */
  workerName: string;
  /** Jobs that run at the same time in this process; 2 unless told. */
  concurrency?: number;
  /** How often the table is looked at without being woken; 5 s unless told. */
  pollSeconds?: number;
  /** How often a running job says that it lives and looks whether it was cancelled; 2 s unless told. */
  heartbeatSeconds?: number;
  /** A job not heard of for this long is given to another worker; 30 s unless told. */
  deadAfterSeconds?: number;
  /** Pause before the second attempt, doubled for each further one up to 10 minutes; 2 s unless told. */
  retrySeconds?: number;
}

export interface JobRunner {
  start(): void;
  /** Looks at the table now: there may be work. */
  wake(): void;
  /** Takes no more work, asks running jobs to stop and waits for them; they go on in another worker. */
  stop(): Promise<void>;
}

const longestRetrySeconds = 600;

/**
 * Runs jobs from the job table: any number of workers side by side, each job in one of them at a time,
 * and again after a failure, a crash or a restart, until it is done or given up.
 */
export function createJobRunner(options: JobRunnerOptions): JobRunner {
  const { dataSource, logger, handlers, workerName } = options;
  const { concurrency = 2, pollSeconds = 5, heartbeatSeconds = 2, deadAfterSeconds = 30 } = options;
  const { retrySeconds = 2 } = options;
  const store = createJobStore(dataSource, workerName, deadAfterSeconds);
  const kinds = Object.keys(handlers) as JobKind[];
  const running = new Map<Promise<void>, AbortController>();
  let stopped = false;
  let timer: NodeJS.Timeout | null = null;
  let looking: Promise<void> | null = null;
  let lookAgain = false;

  async function look(): Promise<void> {
    const abandoned = await store.reclaimAbandoned();
    if (abandoned > 0)
      logger.warn({ jobs: abandoned }, 'jobs of a worker that is not heard of were put back');
    while (!stopped && running.size < concurrency) {
      const job = await store.claim(kinds);
      if (job === null) return;
      begin(job);
    }
  }

  function wake(): void {
    lookAgain = true;
    if (stopped || looking !== null) return;
    lookAgain = false;
    looking = look()
      .catch((error: unknown) => logger.warn({ err: error }, 'the job table could not be read; trying again'))
      .finally(() => {
        looking = null;
        if (lookAgain) wake();
      });
  }

  function begin(job: Claim): void {
    const controller = new AbortController();
    const work: Promise<void> = run(job, controller)
      .catch((error: unknown) => logger.error({ err: error, job: job.id }, 'a job could not be ended'))
      .finally(() => {
        running.delete(work);
        wake();
      });
    running.set(work, controller);
  }

  async function run(job: Claim, controller: AbortController): Promise<void> {
    const log = logger.child({ job: job.id, kind: job.kind, station: job.stationId, attempt: job.attempt });
    log.info('a job begins');
    const stopHeart = keepAlive(job, controller);
    const progress = createProgressWriter((state) => store.writeProgress(job, state));
    let failure: unknown = null;
    try {
      await handle(job, {
        job,
        dataSource,
        signal: controller.signal,
        progress: (done, total) => progress.report(done, total),
        assertOurs: async (manager) => {
          if (!(await store.holds(manager, job))) throw new JobStopped('lost');
        },
        logger: log,
      });
    } catch (error) {
      failure = error ?? new Error('The job failed without saying why.');
    }
    try {
      await progress.finish();
      const end = endOf(job, failure, controller.signal);
      if (end === null) log.warn("the job is another worker's now");
      else {
        await endUntilStored(job, end, log);
        log.info({ end: end.state, err: failure ?? undefined }, 'a job ended');
      }
    } finally {
      // Also when its end could not be stored: a heart that beats on for nobody keeps the job from being put back.
      stopHeart();
    }
  }

  /** The registry is typed per kind; a claimed row is of one kind, known only now. */
  function handle(
    job: Claim,
    context: Omit<Parameters<JobHandler<JobKind>>[0], 'job'> & { job: Claim },
  ): Promise<void> {
    const handler = handlers[job.kind] as JobHandler<JobKind> | undefined;
    if (handler === undefined) throw new Error(`There is no handler for jobs of the kind ${job.kind}.`);
    return handler(context);
  }

  function endOf(job: Claim, failure: unknown, signal: AbortSignal): JobEnd | null {
    const stop: unknown = signal.aborted ? signal.reason : failure;
    if (stop instanceof JobStopped && stop.why === 'lost') return null;
    if (failure === null) return { state: 'done' };
    if (stop instanceof JobStopped && stop.why === 'cancelled') return { state: 'cancelled' };
    if (stop instanceof JobStopped) {
      return { state: 'queued', error: null, inSeconds: 0, attempts: job.attempt - 1 };
    }
    const error = failure instanceof Error ? failure.message : String(failure);
    if (failure instanceof JobRefused || job.attempt >= job.maxAttempts) return { state: 'dead', error };
    const pause = Math.min(longestRetrySeconds, retrySeconds * 2 ** (job.attempt - 1));
    // Half of it by chance, so that jobs that failed together do not come back together.
    return { state: 'queued', error, inSeconds: pause * (0.5 + Math.random() / 2), attempts: job.attempt };
  }

  /**
   * The database may be away, which is often why the job failed. Past the time after which the job counts
   * as abandoned there is no point: it is put back by whoever looks next.
   */
  async function endUntilStored(job: Claim, end: JobEnd, log: Logger): Promise<void> {
    const deadline = performance.now() + deadAfterSeconds * 1000;
    for (let pauseMs = 100; ; pauseMs = Math.min(pauseMs * 2, 2_000)) {
      try {
        return await store.end(job, end);
      } catch (error) {
        if (stopped || performance.now() + pauseMs > deadline) throw error;
        log.warn({ err: error }, 'the end of a job could not be stored; trying again');
        await delay(pauseMs);
      }
    }
  }

  function keepAlive(job: Claim, controller: AbortController): () => void {
    let beating = false;
    const heart = setInterval(() => {
      if (beating) return;
      beating = true;
      store
        .heartbeat(job)
        .then((state) => {
          if (state === null) controller.abort(new JobStopped('lost'));
          else if (state.cancelRequested) controller.abort(new JobStopped('cancelled'));
        })
        .catch((error: unknown) =>
          logger.warn({ err: error, job: job.id }, 'a heartbeat could not be stored'),
        )
        .finally(() => {
          beating = false;
        });
    }, heartbeatSeconds * 1000);
    return () => clearInterval(heart);
  }

  return {
    start() {
      timer = setInterval(wake, pollSeconds * 1000);
      wake();
    },
    wake,
    async stop() {
      stopped = true;
      if (timer !== null) clearInterval(timer);
      await looking;
      for (const controller of running.values()) controller.abort(new JobStopped('shutdown'));
      await Promise.allSettled(running.keys());
    },
  };
}
