import type { EntityManager } from 'typeorm';

/** [rows, count]: what TypeORM gives back for UPDATE ... RETURNING. */
type Returned = [unknown[], number];

export const jobRepository = {
  /** A waiting job ends at once; a running one is asked to stop and ends at its next step. */
  async cancel(manager: EntityManager, stationId: number, id: number): Promise<boolean> {
    const [, count]: Returned = await manager.query(
      `UPDATE job SET cancel_requested = true,
         state = CASE WHEN state = 'queued' THEN 'cancelled' ELSE state END,
         finished_at = CASE WHEN state = 'queued' THEN now() ELSE finished_at END
       WHERE station_id = $1 AND id = $2 AND state IN ('queued', 'running') RETURNING id`,
      [stationId, id],
    );
    return count === 1;
  },
  async retry(manager: EntityManager, stationId: number, id: number): Promise<boolean> {
    const [, count]: Returned = await manager.query(
      `UPDATE job SET state = 'queued', attempts = 0, run_at = now(), error = NULL, finished_at = NULL, cancel_requested = false
       WHERE station_id = $1 AND id = $2 AND state = 'dead' RETURNING id`,
      [stationId, id],
    );
    return count === 1;
  },
};
