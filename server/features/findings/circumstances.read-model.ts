import type { EntityManager } from 'typeorm';
import type { FrozenDwell } from './evidence.ts';
import type { DwellAuthor } from './dwell-changes.ts';

/** Dwells of all receivers that overlap the time, cut to it, by start. */
export async function readDwells(
  manager: EntityManager,
  stationId: number,
  fromMs: number,
  toMs: number,
): Promise<FrozenDwell[]> {
  const rows: {
    id: number;
    receiver_id: number;
    receiver: string;
    antenna_id: number;
    antenna: string;
    starts_at: Date;
    ends_at: Date | null;
  }[] = await manager.query(
    `SELECT d.id, d.receiver_id, r.call_sign AS receiver, d.antenna_id, a.name AS antenna, d.starts_at, d.ends_at
     FROM dwell d
     JOIN receiver r ON r.station_id = d.station_id AND r.id = d.receiver_id
     JOIN antenna a ON a.station_id = d.station_id AND a.id = d.antenna_id
     WHERE d.station_id = $1 AND d.during && tstzrange($2, $3) ORDER BY d.starts_at, d.receiver_id`,
    [stationId, new Date(fromMs), new Date(toMs)],
  );
  return rows.map((row) => ({
    id: row.id,
    receiverId: row.receiver_id,
    receiver: row.receiver,
    antennaId: row.antenna_id,
    antenna: row.antenna,
    startMs: Math.max(fromMs, row.starts_at.getTime()),
    // A dwell that was still on, and one that ended later, are the same within these nights.
    endMs: Math.min(toMs, row.ends_at?.getTime() ?? Infinity),
  }));
}

/** Who changed the dwells of a stretch of time last, after an instant. */
export async function readDwellAuthors(
  manager: EntityManager,
  stationId: number,
  since: Date,
  fromMs: number,
  toMs: number,
): Promise<DwellAuthor[]> {
  const rows: { dwell_id: number; who: string; at: Date }[] = await manager.query(
    `SELECT DISTINCT ON (c.dwell_id) c.dwell_id, c.at,
       coalesce(u.name, 'API token ' || k.name, 'somebody who has left') AS who
     FROM dwell_change c
     CROSS JOIN LATERAL unnest(ARRAY[c.before, c.after]) AS version (dwell)
     LEFT JOIN app_user u ON u.id = c.user_id
     LEFT JOIN api_token k ON k.station_id = c.station_id AND k.id = c.token_id
     WHERE c.station_id = $1 AND c.at > $2
       AND (dwell->>'startsAt')::timestamptz < $4
       AND coalesce((dwell->>'endsAt')::timestamptz, 'infinity') > $3
     ORDER BY c.dwell_id, c.id DESC`,
    [stationId, since, new Date(fromMs), new Date(toMs)],
  );
  return rows.map((row) => ({ dwellId: row.dwell_id, who: row.who, at: row.at.toISOString() }));
}

export interface ImportEvent {
  fileName: string;
  action: 'started' | 'undone';
  who: string;
  at: string;
}

/** Files of these nights that were read or undone after a time, oldest first. */
export async function readImportEvents(
  manager: EntityManager,
  stationId: number,
  since: Date,
  fromMs: number,
  toMs: number,
): Promise<ImportEvent[]> {
  const rows: { file_name: string; action: string; who: string; at: Date }[] = await manager.query(
    `SELECT i.file_name, e.action, e.at, coalesce(u.name, 'somebody who has left') AS who
     FROM audit_entry e
     JOIN import i ON i.station_id = e.station_id AND i.id::text = e.target
     LEFT JOIN app_user u ON u.id = e.user_id
     WHERE e.station_id = $1 AND e.action IN ('import.start', 'import.undo') AND e.at > $2
       AND i.first_at < $4 AND i.last_at >= $3
     ORDER BY e.id`,
    [stationId, since, new Date(fromMs), new Date(toMs)],
  );
  return rows.map((row) => ({
    fileName: row.file_name,
    action: row.action === 'import.undo' ? 'undone' : 'started',
    who: row.who,
    at: row.at.toISOString(),
  }));
}

/** Whether a night has units, under whichever rules. */
export async function nightHasUnits(
  manager: EntityManager,
  stationId: number,
  night: string,
): Promise<boolean> {
  const rows: unknown[] = await manager.query(
    'SELECT 1 FROM unit_night WHERE station_id = $1 AND night = $2 LIMIT 1',
    [stationId, night],
  );
  return rows.length > 0;
}

/** The name under which a person signs a record. */
export async function personName(manager: EntityManager, userId: string | null): Promise<string> {
  const rows: { name: string }[] = await manager.query('SELECT name FROM app_user WHERE id = $1', [userId]);
  return rows[0]?.name ?? 'somebody';
}
