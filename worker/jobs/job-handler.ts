import type { DataSource, EntityManager } from 'typeorm';
import type { JobKind, JobPayloads } from '../../server/platform/job-queue.ts';
import type { Logger } from '../../server/platform/logger.ts';

/** A piece of long work, as a handler sees it. */
export interface ClaimedJob<Kind extends JobKind> {
  id: number;
  stationId: number;
  kind: Kind;
  payload: JobPayloads[Kind];
  /** 1 at the first try. A second one finds what the first has stored: handlers go on, or are idempotent. */
  attempt: number;
  createdBy: string | null;
}

export interface JobContext<Kind extends JobKind> {
  job: ClaimedJob<Kind>;
  dataSource: DataSource;
  /**
   * Aborted when a person cancels the job, the process ends, or the job was given to another worker. The
   * handler stops at its next step (`signal.throwIfAborted()`) with everything stored so far consistent.
   */
  signal: AbortSignal;
  /** How far it is, in any unit that counts up to `total`. Call it as often as you like: it is throttled. */
  progress: (done: number, total: number) => void;
  /**
   * To be called in each transaction that stores something: throws when this worker is no longer the
   * job's (it hung so long that another took over), so that two never write for one job.
   */
  assertOurs: (manager: EntityManager) => Promise<void>;
  logger: Logger;
}

export type JobHandler<Kind extends JobKind> = (context: JobContext<Kind>) => Promise<void>;

/** Kind -> handler; kinds that are left out are left to other workers. */
export type JobHandlers = { [Kind in JobKind]?: JobHandler<Kind> };

/**
 * Thrown by a handler when trying again cannot help (an unreadable file): the job ends as dead at once.
 * The message is the sentence a person reads.
 */
export class JobRefused extends Error {
  override name = 'JobRefused';
}

/** Why a signal was aborted. */
export class JobStopped extends Error {
  override name = 'JobStopped';
  constructor(readonly why: 'cancelled' | 'shutdown' | 'lost') {
    super(
      {
        cancelled: 'The job was cancelled.',
        shutdown: 'The worker is stopping; the job goes on when one is up again.',
        lost: 'The job was given to another worker, because this one was not heard of for too long.',
      }[why],
    );
  }
}
