import type { EntityManager } from 'typeorm';

/**
 * Says that the units of a stretch of time have to be made anew, by the hour (every block length divides
 * it). Call it in the transaction that changes the spots or dwells: the mark is there if and only if the
 * change is.
 *
 * DO UPDATE, not DO NOTHING: it takes the lock of a row that exists already, so that a unit maker that is
 * about to delete the row waits for this transaction and then sees its spots. With DO NOTHING it would
 * delete the mark, read without them, and nobody would ever make them.
 */
export async function markDirty(
  manager: EntityManager,
  stationId: number,
  from: Date,
  to: Date | null,
): Promise<number> {
  const rows: unknown[] = await manager.query(
    `WITH extent AS (
       SELECT (SELECT heard_at FROM spot WHERE station_id = $1 ORDER BY heard_at LIMIT 1) AS first,
              (SELECT heard_at FROM spot WHERE station_id = $1 ORDER BY heard_at DESC LIMIT 1) AS last
     )
     INSERT INTO dirty_block (station_id, starts_at)
     SELECT $1, hour FROM extent, generate_series(
       date_trunc('hour', greatest($2::timestamptz, first), 'UTC'),
       least(coalesce($3::timestamptz, last), last),
       interval '1 hour') AS hour
     ORDER BY hour
     ON CONFLICT (station_id, starts_at) DO UPDATE SET marked_at = now()
     RETURNING 1`,
    [stationId, from, to],
  );
  return rows.length;
}

/** After a change of the standing rules or of the position: everything. */
export function markAllDirty(manager: EntityManager, stationId: number): Promise<number> {
  return markDirty(manager, stationId, new Date(0), null);
}

/** As `markDirty`, for hours that the caller knows: each date is the start of an hour of UTC. */
export async function markHoursDirty(
  manager: EntityManager,
  stationId: number,
  hours: readonly Date[],
): Promise<void> {
  await manager.query(
    // Sorted, as above: two writers that mark the same hours wait for each other in one order.
    `INSERT INTO dirty_block (station_id, starts_at)
     SELECT $1, hour FROM unnest($2::timestamptz[]) AS hour ORDER BY hour
     ON CONFLICT (station_id, starts_at) DO UPDATE SET marked_at = now()`,
    [stationId, hours],
  );
}
