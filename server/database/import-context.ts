import type { EntityManager } from 'typeorm';
import type { LoggedDwell } from '../../shared/imports/dwell-plan.ts';
import type { ReadingContext } from '../../shared/imports/reading.ts';

/** What a file's reader has to know of a station: both the preview and the import read with this. */
export async function loadReadingContext(
  manager: EntityManager,
  stationId: number,
  nowMs: number,
): Promise<ReadingContext> {
  const receivers: { id: number; callSign: string }[] = await manager.query(
    'SELECT id, call_sign AS "callSign" FROM receiver WHERE station_id = $1 ORDER BY id',
    [stationId],
  );
  const antennas: { id: number; name: string }[] = await manager.query(
    'SELECT id, name FROM antenna WHERE station_id = $1 ORDER BY id',
    [stationId],
  );
  return { receivers, antennas, nowMs };
}

/** The dwells of some receivers that touch `[fromMs, ∞)`: a line without an end needs what comes after it. */
export async function loadLoggedDwells(
  manager: EntityManager,
  stationId: number,
  receiverIds: readonly number[],
  fromMs: number,
): Promise<LoggedDwell[]> {
  const rows: { receiver_id: number; antenna_id: number; starts_at: Date; ends_at: Date | null }[] =
    await manager.query(
      `SELECT receiver_id, antenna_id, starts_at, ends_at FROM dwell
       WHERE station_id = $1 AND receiver_id = ANY($2) AND (ends_at IS NULL OR ends_at > $3)
       ORDER BY starts_at`,
      [stationId, receiverIds, new Date(fromMs)],
    );
  return rows.map((row) => ({
    receiverId: row.receiver_id,
    antennaId: row.antenna_id,
    startMs: row.starts_at.getTime(),
    endMs: row.ends_at?.getTime() ?? null,
  }));
}
