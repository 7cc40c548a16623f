import type { EntityManager } from 'typeorm';
import { numberCursor, pageOf } from '../../platform/keyset.ts';

interface Row {
  id: number;
  at: Date;
  who: string;
  action: string;
  target: string;
  detail: Record<string, unknown>;
}

/** Who joins or sets up is not signed in yet: there the target is the person who did it. */
export async function readAuditPage(
  manager: EntityManager,
  stationId: number,
  after: string | undefined,
  limit: number,
) {
  const rows: Row[] = await manager.query(
    `SELECT e.id, e.at, e.action, e.target, e.detail,
       coalesce(u.name, 'API token ' || t.name, 'nobody signed in') AS who
     FROM audit_entry e
     LEFT JOIN app_user u ON u.id = e.user_id
       OR (e.user_id IS NULL AND e.action IN ('member.join', 'station.set-up') AND u.id::text = e.target)
     LEFT JOIN api_token t ON t.station_id = e.station_id AND t.id = e.token_id
     WHERE e.station_id = $1 AND ($2::bigint IS NULL OR e.id < $2)
     ORDER BY e.id DESC LIMIT $3`,
    [stationId, numberCursor(after), limit + 1],
  );
  const { items, next } = pageOf(rows, limit, (row) => String(row.id));
  return { items: items.map((row) => ({ ...row, at: row.at.toISOString() })), next };
}
