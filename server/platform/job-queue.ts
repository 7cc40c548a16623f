import type { EntityManager } from 'typeorm';
import { wakeWorkers } from './notify.ts';

export interface JobPayloads {
  import: { importId: number };
  'import-undo': { importId: number };
  /** Units under other rules than the standing ones, for two antennas or (null) all pairs. */
  units: { rulesKey: string };
  bearings: Record<string, never>;
}
export type JobKind = keyof JobPayloads;

/**
 * Puts work into the queue, in the caller's transaction: it is there if and only if what asked for it is.
 * Returns the job's id.
 */
export async function enqueueJob<Kind extends JobKind>(
  manager: EntityManager,
  stationId: number,
  kind: Kind,
  payload: JobPayloads[Kind],
  createdBy: string | null = null,
): Promise<number> {
  const rows: { id: number }[] = await manager.query(
    'INSERT INTO job (station_id, kind, payload, created_by) VALUES ($1, $2, $3, $4) RETURNING id',
    [stationId, kind, JSON.stringify(payload), createdBy],
  );
  await wakeWorkers(manager);
  return rows[0]!.id;
}
