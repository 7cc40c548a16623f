import type { EntityManager } from 'typeorm';
import type { z } from 'zod';
import type { dwellHistoryEntry } from '../../../shared/contracts/dwell.ts';
import { numberCursor } from '../../platform/keyset.ts';
import { recordFromSnapshot } from './dwell-record.ts';
import type { DwellSnapshot, DwellStep } from './dwell-record.ts';
import { batchSummary, isSwitch } from './dwell-wording.ts';
import type { LogNames } from './dwell-wording.ts';

type HistoryEntry = z.input<typeof dwellHistoryEntry>;

interface BatchRow {
  batch_id: string;
  last_id: number;
  at: Date;
  who: string;
  is_import: boolean;
  dwells: number;
}
interface ChangeRow {
  batch_id: string;
  dwell_id: number;
  action: DwellStep['action'];
  before: DwellSnapshot | null;
  after: DwellSnapshot | null;
  can_undo: boolean;
}

/** Rows of the history looked through for one page: an import may have written thousands in one batch. */
const rowsAtOnce = 20_000;

/** Batches of changes, newest first; `after` is the place of the last batch seen. */
export async function listHistory(
  manager: EntityManager,
  stationId: number,
  names: LogNames,
  after: string | undefined,
  limit: number,
): Promise<{ items: HistoryEntry[]; next: string | null }> {
  const { batches, lookedTo } = await readBatches(manager, stationId, numberCursor(after), limit + 1);
  const page = batches.slice(0, limit);
  const changes = await readChanges(
    manager,
    stationId,
    page.filter((batch) => !batch.is_import).map((batch) => batch.batch_id),
  );
  const items = page.map((batch) => presentBatch(batch, changes.get(batch.batch_id) ?? [], names));
  if (batches.length > limit) return { items, next: String(page.at(-1)!.last_id) };
  return { items, next: lookedTo === null ? null : String(lookedTo) };
}

/** `lookedTo`: the id down to which rows were looked through, when there may be more below. */
async function readBatches(
  manager: EntityManager,
  stationId: number,
  before: number | null,
  limit: number,
): Promise<{ batches: BatchRow[]; lookedTo: number | null }> {
  const looked: { rows: number; lowest: number | null }[] = await manager.query(
    `SELECT count(*)::int AS rows, min(id) AS lowest FROM (
       SELECT id FROM dwell_change WHERE station_id = $1 AND ($2::bigint IS NULL OR id < $2)
       ORDER BY id DESC LIMIT $3) AS newest`,
    [stationId, before, rowsAtOnce],
  );
  const { rows, lowest } = looked[0]!;
  const batches: BatchRow[] = await manager.query(
    `WITH candidate AS (
       SELECT batch_id, max(id) AS last_id FROM dwell_change
       WHERE station_id = $1 AND ($2::bigint IS NULL OR id < $2) AND id >= $3
       GROUP BY batch_id
     )
     SELECT c.batch_id, c.last_id, l.at, l.action = 'import' AS is_import, whole.dwells,
       coalesce(u.name, 'API token ' || t.name, 'somebody who has left') AS who
     FROM candidate c
     JOIN dwell_change l ON l.station_id = $1 AND l.id = c.last_id
     CROSS JOIN LATERAL (
       SELECT max(id) AS last_id, count(*)::int AS dwells FROM dwell_change
       WHERE station_id = $1 AND batch_id = c.batch_id) AS whole
     LEFT JOIN app_user u ON u.id = l.user_id
     LEFT JOIN api_token t ON t.station_id = $1 AND t.id = l.token_id
     -- Rows of batches that were written at the same time interleave: one seen before is not shown again.
     WHERE whole.last_id = c.last_id
     ORDER BY c.last_id DESC LIMIT $4`,
    [stationId, before, lowest ?? 0, limit],
  );
  return { batches, lookedTo: rows === rowsAtOnce ? lowest : null };
}

/** `can_undo`: the dwell is as the change left it, and where it was before no other one is now. */
async function readChanges(
  manager: EntityManager,
  stationId: number,
  batchIds: readonly string[],
): Promise<Map<string, ChangeRow[]>> {
  const rows: ChangeRow[] = await manager.query(
    `SELECT c.batch_id, c.dwell_id, c.action, c.before, c.after,
       CASE WHEN c.after IS NULL THEN d.id IS NULL
       ELSE d.id IS NOT NULL AND d.antenna_id = (c.after->>'antennaId')::int
         AND d.starts_at = (c.after->>'startsAt')::timestamptz
         AND d.ends_at IS NOT DISTINCT FROM (c.after->>'endsAt')::timestamptz
         AND d.note = c.after->>'note' END
       AND (c.before IS NULL OR (
         EXISTS (SELECT FROM antenna a WHERE a.station_id = $1 AND a.id = (c.before->>'antennaId')::int)
         AND NOT EXISTS (
           SELECT FROM dwell other
           WHERE other.station_id = $1 AND other.receiver_id = (c.before->>'receiverId')::int
             AND other.during && tstzrange((c.before->>'startsAt')::timestamptz, (c.before->>'endsAt')::timestamptz)
             AND NOT EXISTS (
               SELECT FROM dwell_change same
               WHERE same.station_id = $1 AND same.batch_id = c.batch_id AND same.dwell_id = other.id)))) AS can_undo
     FROM dwell_change c
     LEFT JOIN dwell d ON d.station_id = $1 AND d.id = c.dwell_id
     WHERE c.station_id = $1 AND c.batch_id = ANY($2::uuid[])
     ORDER BY c.id`,
    [stationId, batchIds],
  );
  const byBatch = new Map<string, ChangeRow[]>();
  for (const row of rows) byBatch.set(row.batch_id, [...(byBatch.get(row.batch_id) ?? []), row]);
  return byBatch;
}

function presentBatch(batch: BatchRow, changes: ChangeRow[], names: LogNames): HistoryEntry {
  const { batch_id: batchId, who, dwells } = batch;
  const entry = { batchId, at: batch.at.toISOString(), who, dwellCount: dwells };
  if (batch.is_import) {
    const count = `${dwells.toLocaleString('en-GB')} ${dwells === 1 ? 'dwell' : 'dwells'}`;
    return { ...entry, action: 'import', summary: `Import of a file: ${count}.`, canUndo: false };
  }
  const steps = changes.map((change): DwellStep => ({
    action: change.action,
    before: change.before && recordFromSnapshot(change.dwell_id, change.before),
    after: change.after && recordFromSnapshot(change.dwell_id, change.after),
    changeIndex: null,
  }));
  const actions = new Set(steps.map((step) => step.action));
  return {
    ...entry,
    action: isSwitch(steps) ? 'switch' : actions.size === 1 ? [...actions][0]! : 'several',
    summary: batchSummary(steps, names),
    canUndo: changes.every((change) => change.can_undo),
  };
}
