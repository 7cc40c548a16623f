import type { DataSource, EntityManager } from 'typeorm';
import { inTransaction } from '../../server/database/transaction.ts';
import type { JobKind, JobPayloads } from '../../server/platform/job-queue.ts';
import { publish } from '../../server/platform/notify.ts';
import type { ClaimedJob } from './job-handler.ts';

export interface JobProgress {
  done: number;
  total: number;
  secondsLeft: number | null;
}

/** How a piece of work ended, and what becomes of it. */
export type JobEnd =
  | { state: 'done' | 'cancelled' }
  | { state: 'dead'; error: string }
  /** `attempts` as it shall stand: an attempt that the worker's own end cut short does not count. */
  | { state: 'queued'; error: string | null; inSeconds: number; attempts: number };

interface JobRow {
  id: number;
  station_id: number;
  kind: JobKind;
  payload: JobPayloads[JobKind];
  attempts: number;
  max_attempts: number;
  created_by: string | null;
}

export type Claim = ClaimedJob<JobKind> & { maxAttempts: number };

/**
 * The job table as a queue. A claim is (worker, attempt): every later write names both, so that a worker
 * that slept through its own replacement changes nothing.
 */
export function createJobStore(dataSource: DataSource, workerName: string, deadAfterSeconds: number) {
  const mine = 'station_id = $1 AND id = $2 AND claimed_by = $3 AND attempts = $4 AND state = $5';
  const claimOf = (job: Claim): unknown[] => [job.stationId, job.id, workerName, job.attempt, 'running'];

  return {
    /** Takes the job that waits longest, or null. */
    async claim(kinds: readonly JobKind[]): Promise<Claim | null> {
      return inTransaction(dataSource, async (manager) => {
        const [rows]: [JobRow[], number] = await manager.query(
          `UPDATE job SET state = 'running', claimed_by = $1, heartbeat_at = now(), attempts = attempts + 1
           WHERE (station_id, id) = (
             SELECT station_id, id FROM job
             WHERE state = 'queued' AND run_at <= now() AND kind = ANY($2)
             ORDER BY run_at, id LIMIT 1 FOR UPDATE SKIP LOCKED)
           RETURNING id, station_id, kind, payload, attempts, max_attempts, created_by`,
          [workerName, kinds],
        );
        const row = rows[0];
        if (row === undefined) return null;
        await publish(manager, row.station_id, { type: 'job', jobId: row.id });
        return {
          id: row.id,
          stationId: row.station_id,
          kind: row.kind,
          payload: row.payload,
          attempt: row.attempts,
          maxAttempts: row.max_attempts,
          createdBy: row.created_by,
        };
      });
    },

    /**
     * Puts back what belongs to workers that are not heard of any more. A job that ended its worker each
     * time (out of memory, for one) must not do so for ever: after the last attempt it is dead.
     */
    async reclaimAbandoned(): Promise<number> {
      return inTransaction(dataSource, async (manager) => {
        const [rows]: [{ station_id: number; id: number }[], number] = await manager.query(
          `UPDATE job SET claimed_by = NULL, heartbeat_at = NULL,
             state = CASE WHEN cancel_requested THEN 'cancelled' WHEN attempts >= max_attempts THEN 'dead' ELSE 'queued' END,
             error = CASE WHEN NOT cancel_requested AND attempts >= max_attempts
               THEN 'The worker stopped without a word in the last of ' || attempts || ' attempts.' ELSE error END,
             finished_at = CASE WHEN cancel_requested OR attempts >= max_attempts THEN now() END
           WHERE (station_id, id) IN (
             SELECT station_id, id FROM job
             WHERE state = 'running' AND heartbeat_at < now() - $1 * interval '1 second'
             FOR UPDATE SKIP LOCKED)
           RETURNING station_id, id`,
          [deadAfterSeconds],
        );
        for (const row of rows) await publish(manager, row.station_id, { type: 'job', jobId: row.id });
        return rows.length;
      });
    },

    /** Says that the worker lives. Null when the job is not this worker's any more. */
    async heartbeat(job: Claim): Promise<{ cancelRequested: boolean } | null> {
      const [rows]: [{ cancel_requested: boolean }[], number] = await dataSource.query(
        `UPDATE job SET heartbeat_at = now() WHERE ${mine} RETURNING cancel_requested`,
        claimOf(job),
      );
      return rows[0] === undefined ? null : { cancelRequested: rows[0].cancel_requested };
    },

    async writeProgress(job: Claim, progress: JobProgress): Promise<void> {
      await inTransaction(dataSource, async (manager) => {
        const [, count]: [unknown, number] = await manager.query(
          `UPDATE job SET progress = $6, heartbeat_at = now() WHERE ${mine}`,
          [...claimOf(job), JSON.stringify(progress)],
        );
        if (count === 1) await publish(manager, job.stationId, { type: 'job', jobId: job.id });
      });
    },

    /** Whether the claim stands, until the end of the caller's transaction. */
    async holds(manager: EntityManager, job: Claim): Promise<boolean> {
      const rows: unknown[] = await manager.query(
        `SELECT 1 FROM job WHERE ${mine} FOR NO KEY UPDATE`,
        claimOf(job),
      );
      return rows.length === 1;
    },

    async end(job: Claim, end: JobEnd): Promise<void> {
      const again = end.state === 'queued' ? end : null;
      await inTransaction(dataSource, async (manager) => {
        const [, count]: [unknown, number] = await manager.query(
          `UPDATE job SET state = $6, error = $7, claimed_by = NULL, heartbeat_at = NULL,
             attempts = $8, run_at = now() + $9 * interval '1 second',
             finished_at = CASE WHEN $6 = 'queued' THEN NULL ELSE now() END
           WHERE ${mine}`,
          [
            ...claimOf(job),
            end.state,
            'error' in end ? end.error : null,
            again?.attempts ?? job.attempt,
            again?.inSeconds ?? 0,
          ],
        );
        if (count === 1) await publish(manager, job.stationId, { type: 'job', jobId: job.id });
      });
    },
  };
}

export type JobStore = ReturnType<typeof createJobStore>;
