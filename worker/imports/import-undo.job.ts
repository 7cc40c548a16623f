import { randomUUID } from 'node:crypto';
import type { EntityManager } from 'typeorm';
import { markHoursDirty } from '../../server/database/dirty-blocks.ts';
import { inTransaction } from '../../server/database/transaction.ts';
import { publish } from '../../server/platform/notify.ts';
import type { JobContext, JobHandler } from '../jobs/job-handler.ts';
import { lockReceivers, markStretchesDirty, removeDwells } from './dwell-store.ts';

/** Spots removed in one transaction. */
const batchRows = 20_000;

/**
 * Takes back what an import added, and nothing else: its rows carry its number. A second run after a crash
 * goes on with what is left. The uploaded file and the refusals stay; an import that was cancelled stays so.
 */
export const runImportUndoJob: JobHandler<'import-undo'> = async (context) => {
  const { stationId, payload } = context.job;
  const rows: { kind: string; state: string; rows_stored: number; rows_undone: number }[] =
    await context.dataSource.query(
      'SELECT kind, state, rows_stored, rows_undone FROM import WHERE station_id = $1 AND id = $2',
      [stationId, payload.importId],
    );
  const record = rows[0];
  if (record === undefined || !['done', 'failed', 'cancelled'].includes(record.state)) return;
  if (record.kind === 'spots') await removeSpots(context, record.rows_undone, record.rows_stored);
  else await removeLog(context);
  await inTransaction(context.dataSource, async (manager) => {
    await context.assertOurs(manager);
    await manager.query(
      `UPDATE import SET state = CASE WHEN state = 'cancelled' THEN state ELSE 'undone' END, finished_at = now()
       WHERE station_id = $1 AND id = $2`,
      [stationId, payload.importId],
    );
    await publish(manager, stationId, { type: 'import', importId: payload.importId });
  });
};

async function removeSpots(
  context: JobContext<'import-undo'>,
  undoneBefore: number,
  total: number,
): Promise<void> {
  let undone = undoneBefore;
  for (let from: Date | null = new Date(0); from !== null;) {
    context.signal.throwIfAborted();
    const start: Date = from;
    const step = await inTransaction(context.dataSource, async (manager) => {
      await context.assertOurs(manager);
      return removeBatch(manager, context.job.stationId, context.job.payload.importId, start);
    });
    undone += step.removed;
    from = step.next;
    context.progress(undone, Math.max(undone, total));
  }
}

/**
 * The spots of one import from a second on, in order of time, at most a batch and the rest of its last
 * second. There is no index on the import, which each stored spot would have to pay for: the key by time
 * serves, from the first row of this import to its last.
 */
async function removeBatch(
  manager: EntityManager,
  stationId: number,
  importId: number,
  from: Date,
): Promise<{ removed: number; next: Date | null }> {
  const extent: { first: Date | null; last: Date | null }[] = await manager.query(
    `SELECT min(heard_at) AS first, max(heard_at) AS last FROM (
       SELECT heard_at FROM spot
       WHERE station_id = $1 AND import_id = $2 AND heard_at >= $3 AND heard_at <= coalesce(
         (SELECT last_at FROM import WHERE station_id = $1 AND id = $2), 'infinity')
       ORDER BY heard_at LIMIT $4) AS batch`,
    [stationId, importId, from, batchRows],
  );
  const { first, last } = extent[0]!;
  if (first === null || last === null) return { removed: 0, next: null };
  const windows: { reach: number }[] = await manager.query(
    'SELECT window_seconds * 1.5 AS reach FROM station WHERE id = $1',
    [stationId],
  );
  const [gone]: { removed: number; hours: Date[] | null }[] = await manager.query(
    `WITH gone AS (
       DELETE FROM spot WHERE station_id = $1 AND import_id = $2 AND heard_at BETWEEN $3 AND $4
       RETURNING heard_at + heard_ms * interval '1 millisecond' AS heard)
     SELECT (SELECT count(*) FROM gone) AS removed, (SELECT array_agg(DISTINCT hour) FROM gone,
       LATERAL (VALUES (date_trunc('hour', heard - $5 * interval '1 second', 'UTC')),
         (date_trunc('hour', heard + $5 * interval '1 second', 'UTC'))) AS touched (hour)) AS hours`,
    [stationId, importId, first, last, Number(windows[0]?.reach ?? 0)],
  );
  const { removed, hours } = gone!;
  await manager.query('UPDATE import SET rows_undone = rows_undone + $3 WHERE station_id = $1 AND id = $2', [
    stationId,
    importId,
    removed,
  ]);
  if (hours !== null) await markHoursDirty(manager, stationId, hours);
  await publish(manager, stationId, { type: 'import', importId });
  return { removed, next: last };
}

async function removeLog(context: JobContext<'import-undo'>): Promise<void> {
  const { stationId, createdBy, payload } = context.job;
  await inTransaction(context.dataSource, async (manager) => {
    await context.assertOurs(manager);
    await lockReceivers(manager, stationId);
    const removed = await removeDwells(manager, stationId, payload.importId, randomUUID(), createdBy);
    await markStretchesDirty(manager, stationId, removed);
    await manager.query(
      'UPDATE import SET rows_undone = rows_undone + $3 WHERE station_id = $1 AND id = $2',
      [stationId, payload.importId, removed.length],
    );
    const receiverIds = [...new Set(removed.map(({ receiverId }) => receiverId))];
    if (receiverIds.length > 0) await publish(manager, stationId, { type: 'switch', receiverIds });
    await publish(manager, stationId, { type: 'import', importId: payload.importId });
  });
}
