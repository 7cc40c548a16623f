import type { DataSource, EntityManager } from 'typeorm';
import { importMapping, type ImportKind, type ImportMapping } from '../../shared/contracts/import.ts';
import { inTransaction } from '../../server/database/transaction.ts';
import { enqueueJob } from '../../server/platform/job-queue.ts';
import { publish } from '../../server/platform/notify.ts';
import { JobRefused, type JobContext } from '../jobs/job-handler.ts';
import type { ImportCounts } from './import-progress.ts';

export interface RunningImport {
  stationId: number;
  importId: number;
  kind: ImportKind;
  mapping: ImportMapping;
  sizeBytes: number;
  createdBy: string | null;
  /** What earlier attempts have stored and counted. */
  counts: ImportCounts;
}

interface Row {
  kind: ImportKind;
  mapping: unknown;
  size_bytes: number;
  created_by: string | null;
  rows_read: number;
  rows_stored: number;
  rows_doubled: number;
  rows_refused: number;
}

/** Takes an import up, for the first time or again; null when there is nothing to do any more. */
export async function beginImport(context: JobContext<'import'>): Promise<RunningImport | null> {
  const { stationId } = context.job;
  const { importId } = context.job.payload;
  const row = await inTransaction(context.dataSource, async (manager) => {
    await context.assertOurs(manager);
    const [rows]: [Row[], number] = await manager.query(
      `UPDATE import SET state = 'running', started_at = coalesce(started_at, now()), finished_at = NULL, error = NULL
       WHERE station_id = $1 AND id = $2 AND state IN ('queued', 'running', 'failed')
       RETURNING kind, mapping, size_bytes, created_by, rows_read, rows_stored, rows_doubled, rows_refused`,
      [stationId, importId],
    );
    if (rows[0] !== undefined) await publish(manager, stationId, { type: 'import', importId });
    return rows[0];
  });
  if (row === undefined) return null;
  const mapping = importMapping.safeParse(row.mapping);
  if (!mapping.success) {
    return failImport(context, 'The mapping cannot be read by this version. Choose it again.');
  }
  return {
    stationId,
    importId,
    kind: row.kind,
    mapping: mapping.data,
    sizeBytes: row.size_bytes,
    createdBy: row.created_by,
    counts: {
      rowsRead: row.rows_read,
      rowsStored: row.rows_stored,
      rowsDoubled: row.rows_doubled,
      rowsRefused: row.rows_refused,
    },
  };
}

/** In the transaction that stores the last rows, or after it. */
export async function endImport(
  manager: EntityManager,
  stationId: number,
  importId: number,
): Promise<boolean> {
  const [, count]: [unknown, number] = await manager.query(
    `UPDATE import SET state = 'done', finished_at = now(), bytes_done = size_bytes
     WHERE station_id = $1 AND id = $2 AND state = 'running'`,
    [stationId, importId],
  );
  await publish(manager, stationId, { type: 'import', importId });
  return count === 1;
}

/** What is stored stays; the sentence says why it went no further. Always throws, to end the job for good. */
export async function failImport(context: JobContext<'import'>, sentence: string): Promise<never> {
  const { stationId } = context.job;
  const { importId } = context.job.payload;
  await inTransaction(context.dataSource, async (manager) => {
    await context.assertOurs(manager);
    await manager.query(
      `UPDATE import SET state = 'failed', error = $3, finished_at = now()
       WHERE station_id = $1 AND id = $2 AND state = 'running'`,
      [stationId, importId, sentence],
    );
    await publish(manager, stationId, { type: 'import', importId });
  });
  throw new JobRefused(sentence);
}

/** The import's job was cancelled, not the import: the rows that it has stored are taken back all the same. */
export async function cancelImport(
  dataSource: DataSource,
  stationId: number,
  importId: number,
): Promise<void> {
  await inTransaction(dataSource, async (manager) => {
    const [rows]: [{ rows_stored: number }[], number] = await manager.query(
      `UPDATE import SET state = 'cancelled', finished_at = now()
       WHERE station_id = $1 AND id = $2 AND state IN ('queued', 'running') RETURNING rows_stored`,
      [stationId, importId],
    );
    if (rows[0] === undefined) return;
    if (rows[0].rows_stored > 0) await enqueueJob(manager, stationId, 'import-undo', { importId });
    await publish(manager, stationId, { type: 'import', importId });
  });
}
