import type { EntityManager } from 'typeorm';
import { importMapping } from '../../../shared/contracts/import.ts';
import type { ImportKind, ImportRecord } from '../../../shared/contracts/import.ts';
import { numberCursor, pageOf } from '../../platform/keyset.ts';

interface Row {
  id: number;
  kind: ImportKind;
  file_name: string;
  sha256: string | null;
  size_bytes: number;
  state: ImportRecord['state'];
  mapping: unknown;
  rows_read: number;
  rows_stored: number;
  rows_doubled: number;
  rows_refused: number;
  rows_undone: number;
  bytes_done: number;
  first_at: Date | null;
  last_at: Date | null;
  error: string | null;
  created_by: string | null;
  created_at: Date;
  finished_at: Date | null;
  job_id: number | null;
  same_as: number | null;
  seconds: number | null;
}

/** $1 station. */
const select = `
SELECT i.id, i.kind, i.file_name, encode(i.sha256, 'hex') AS sha256, i.size_bytes, i.state, i.mapping,
  i.rows_read, i.rows_stored, i.rows_doubled, i.rows_refused, i.rows_undone, i.bytes_done,
  i.first_at, i.last_at, i.error, u.name AS created_by, i.created_at, i.finished_at, j.job_id,
  (SELECT min(e.id) FROM import e
   WHERE e.station_id = i.station_id AND e.kind = i.kind AND e.sha256 = i.sha256 AND e.id < i.id) AS same_as,
  extract(epoch FROM coalesce(i.finished_at, now()) - i.started_at)::float8 AS seconds
FROM import i
LEFT JOIN app_user u ON u.id = i.created_by
LEFT JOIN (
  SELECT (payload ->> 'importId')::integer AS import_id, max(id) AS job_id
  FROM job WHERE station_id = $1 AND kind IN ('import', 'import-undo') GROUP BY 1
) j ON j.import_id = i.id
WHERE i.station_id = $1`;

function present(row: Row): ImportRecord {
  const isRunning = row.state === 'running';
  const rate = row.seconds !== null && row.seconds > 0 ? row.rows_read / row.seconds : null;
  const left =
    isRunning && row.seconds !== null && row.bytes_done > 0
      ? (row.seconds / row.bytes_done) * Math.max(0, row.size_bytes - row.bytes_done)
      : null;
  // Written by an earlier release, perhaps: what no longer fits is as good as none.
  const mapping = row.mapping === null ? null : importMapping.safeParse(row.mapping);
  return {
    id: row.id,
    kind: row.kind,
    fileName: row.file_name,
    sha256: row.sha256,
    sizeBytes: row.size_bytes,
    state: row.state,
    mapping: mapping?.success ? mapping.data : null,
    rowsRead: row.rows_read,
    rowsStored: row.rows_stored,
    rowsDoubled: row.rows_doubled,
    rowsRefused: row.rows_refused,
    rowsSkipped: row.rows_read - row.rows_stored - row.rows_doubled - row.rows_refused,
    rowsUndone: row.rows_undone,
    bytesDone: row.bytes_done,
    rowsPerSecond: rate === null ? null : Math.round(rate),
    secondsLeft: left === null ? null : Math.ceil(left),
    firstAt: row.first_at?.toISOString() ?? null,
    lastAt: row.last_at?.toISOString() ?? null,
    error: row.error,
    createdBy: row.created_by,
    createdAt: row.created_at.toISOString(),
    finishedAt: row.finished_at?.toISOString() ?? null,
    jobId: row.job_id,
    sameAsImportId: row.same_as,
  };
}

export async function readImport(
  manager: EntityManager,
  stationId: number,
  importId: number,
): Promise<ImportRecord | null> {
  const rows: Row[] = await manager.query(`${select} AND i.id = $2`, [stationId, importId]);
  return rows[0] ? present(rows[0]) : null;
}

export async function readImportPage(
  manager: EntityManager,
  stationId: number,
  after: string | undefined,
  limit: number,
) {
  const rows: Row[] = await manager.query(
    `${select} AND ($2::bigint IS NULL OR i.id < $2) ORDER BY i.id DESC LIMIT $3`,
    [stationId, numberCursor(after), limit + 1],
  );
  const { items, next } = pageOf(rows, limit, (row) => String(row.id));
  return { items: items.map(present), next };
}

interface RefusalRow {
  lineNo: number;
  field: string | null;
  reason: string;
  raw: string;
}

const mostReasons = 50;

async function readRefusals(
  manager: EntityManager,
  stationId: number,
  importId: number,
  afterLine: number,
  limit: number,
): Promise<RefusalRow[]> {
  return manager.query(
    `SELECT line_no AS "lineNo", field, reason, raw FROM import_refusal
     WHERE station_id = $1 AND import_id = $2 AND line_no > $3 ORDER BY line_no LIMIT $4`,
    [stationId, importId, afterLine, limit],
  );
}

export async function readRefusalPage(
  manager: EntityManager,
  stationId: number,
  importId: number,
  after: string | undefined,
  limit: number,
) {
  const afterLine = numberCursor(after) ?? 0;
  const rows = await readRefusals(manager, stationId, importId, afterLine, limit + 1);
  // The same for each page of a list: counted once.
  const reasons = after === undefined ? await countReasons(manager, stationId, importId) : [];
  return { ...pageOf(rows, limit, (row) => String(row.lineNo)), reasons };
}

/** Reasons that differ in what they quote of the line only are one. */
async function countReasons(manager: EntityManager, stationId: number, importId: number) {
  const rows: { reason: string; lines: number }[] = await manager.query(
    `SELECT regexp_replace(reason, '"[^"]*"', '"…"', 'g') AS reason, count(*) AS lines FROM import_refusal
     WHERE station_id = $1 AND import_id = $2 GROUP BY 1 ORDER BY 2 DESC, 1 LIMIT ${mostReasons}`,
    [stationId, importId],
  );
  return rows;
}

/** All of them in file order, a page at a time. */
export async function* allRefusals(
  manager: EntityManager,
  stationId: number,
  importId: number,
): AsyncGenerator<RefusalRow, void, void> {
  for (let afterLine = 0; ;) {
    const rows = await readRefusals(manager, stationId, importId, afterLine, 5_000);
    yield* rows;
    if (rows.length === 0) return;
    afterLine = rows.at(-1)!.lineNo;
  }
}

export async function listMappings(manager: EntityManager, stationId: number) {
  const rows: { id: number; kind: ImportKind; name: string; mapping: unknown }[] = await manager.query(
    'SELECT id, kind, name, mapping FROM saved_mapping WHERE station_id = $1 ORDER BY kind, lower(name)',
    [stationId],
  );
  return rows.flatMap((row) => {
    const parsed = importMapping.safeParse(row.mapping);
    return parsed.success ? [{ ...row, mapping: parsed.data }] : [];
  });
}
