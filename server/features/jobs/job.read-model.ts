import type { EntityManager } from 'typeorm';
import type { Job } from '../../../shared/contracts/job.ts';

interface Row {
  id: number;
  kind: string;
  state: Job['state'];
  attempts: number;
  progress: Job['progress'];
  error: string | null;
  created_at: Date;
  finished_at: Date | null;
}

const columns = 'id, kind, state, attempts, progress, error, created_at, finished_at';

function present(row: Row): Job {
  const { created_at, finished_at, ...rest } = row;
  return { ...rest, createdAt: created_at.toISOString(), finishedAt: finished_at?.toISOString() ?? null };
}

export async function readJob(manager: EntityManager, stationId: number, id: number): Promise<Job | null> {
  const rows: Row[] = await manager.query(`SELECT ${columns} FROM job WHERE station_id = $1 AND id = $2`, [
    stationId,
    id,
  ]);
  return rows[0] ? present(rows[0]) : null;
}

/** Everything that waits, runs or needs a person, and what ended in the last day. */
export async function listJobs(manager: EntityManager, stationId: number): Promise<Job[]> {
  const rows: Row[] = await manager.query(
    `SELECT ${columns} FROM job
     WHERE station_id = $1 AND (state IN ('queued', 'running', 'dead') OR finished_at > now() - interval '1 day')
     ORDER BY id DESC LIMIT 200`,
    [stationId],
  );
  return rows.map(present);
}
