import type { EntityManager } from 'typeorm';
import type { SpotMapping } from '../../shared/contracts/import.ts';
import type { FileRecord } from '../../shared/imports/delimited.ts';
import { createFileReader } from '../../shared/imports/file-reader.ts';
import type { ReadingContext } from '../../shared/imports/reading.ts';
import {
  blankSpotRow,
  createSpotRowReader,
  isFieldRefusal,
  type SpotRow,
  type SpotRowReader,
} from '../../shared/imports/spot-rows.ts';
import { readImportFile, UnreadableFile } from '../../server/database/import-file.ts';
import { inTransaction } from '../../server/database/transaction.ts';
import { enqueueJob } from '../../server/platform/job-queue.ts';
import type { JobContext } from '../jobs/job-handler.ts';
import { writeSpots } from '../spots/spot-writer.ts';
import { ImportTaken, recordStep } from './import-progress.ts';
import { endImport, failImport, type RunningImport } from './import-record.ts';
import { copyRefusals, type LineRefusal } from './refusal-copy.ts';

export interface ImportLimits {
  /** Nobody corrects more by hand: the mapping is wrong then. */
  mostRefusals: number;
  /** Rows of the file in one transaction. */
  batchRows: number;
}

interface Batch {
  rowsRead: number;
  spots: SpotRow[];
  refusals: LineRefusal[];
  bytesDone: number;
}

/**
 * Stores the spots of a file. Each batch is one transaction with its rows, its refusals and the import's
 * counts, so that a crash at any moment loses and doubles nothing: the next attempt reads the file again
 * from its start, since what a row means can depend on the rows before it, and stores from the row after
 * the last one counted. While one batch is being written the next one is read.
 */
export async function importSpots(
  context: JobContext<'import'>,
  record: RunningImport,
  mapping: SpotMapping,
  reading: ReadingContext,
  { mostRefusals, batchRows }: ImportLimits,
): Promise<void> {
  const { dataSource, signal } = context;
  let committed = { ...record.counts };
  let writing: Promise<void> = Promise.resolve();
  /**
   * Rows of stored batches, to be filled again. New objects for each of millions of rows would live just
   * long enough to make the heap grow by a hundred megabytes before they are collected.
   */
  const spare: SpotRow[] = [];

  async function write(batch: Batch): Promise<void> {
    signal.throwIfAborted();
    const { stationId, importId } = record;
    const before = committed;
    let step = before;
    await writeSpots(dataSource, {
      stationId,
      importId,
      spots: batch.spots,
      alongside: async (manager, { stored, doubled }) => {
        await context.assertOurs(manager);
        const counts = {
          rowsRead: batch.rowsRead,
          rowsStored: stored,
          rowsDoubled: doubled,
          rowsRefused: batch.refusals.length,
        };
        const [firstAt, lastAt] = stored > 0 ? timeRange(batch.spots) : [null, null];
        const { bytesDone } = batch;
        await recordStep(manager, record, before.rowsRead, { ...counts, bytesDone, firstAt, lastAt });
        await copyRefusals(manager, stationId, importId, batch.refusals);
        step = {
          rowsRead: before.rowsRead + counts.rowsRead,
          rowsStored: before.rowsStored + stored,
          rowsDoubled: before.rowsDoubled + doubled,
          rowsRefused: before.rowsRefused + counts.rowsRefused,
        };
      },
    });
    committed = step;
    for (const spot of batch.spots) spare.push(spot);
    context.progress(batch.bytesDone, record.sizeBytes);
  }

  /** At most one batch is being written and one waits: memory stays flat. */
  async function hand(batch: Batch): Promise<void> {
    await writing;
    writing = write(batch);
    // Waited for above or at the end; until then a failure must not count as unhandled.
    writing.catch(() => undefined);
  }

  const batches = readBatches(
    context,
    record,
    (header) => createSpotRowReader(mapping, header, reading, () => spare.pop() ?? blankSpotRow()),
    batchRows,
  );
  try {
    for await (const batch of batches) {
      await hand(batch);
      if (committed.rowsRefused > mostRefusals) break;
    }
  } finally {
    // Also after a failure: what is under way ends before the job does, and is stored if it can be.
    await Promise.allSettled([writing]);
  }
  await writing;
  if (committed.rowsRefused > mostRefusals) {
    await failImport(
      context,
      `More than ${mostRefusals} lines were refused; most likely the mapping is wrong. Undo the import and choose another.`,
    );
  }
  await inTransaction(dataSource, async (manager) => {
    await context.assertOurs(manager);
    await finish(manager, record, committed.rowsStored > 0);
  });
}

async function finish(manager: EntityManager, record: RunningImport, hasStored: boolean): Promise<void> {
  const { stationId, importId } = record;
  if (!(await endImport(manager, stationId, importId))) {
    throw new ImportTaken('The import was cancelled while its last rows were stored.');
  }
  // Calls that the station never heard before have no bearing yet.
  if (hasStored) await enqueueJob(manager, stationId, 'bearings', {});
}

async function* readBatches(
  context: JobContext<'import'>,
  record: RunningImport,
  compile: (header: readonly string[] | null) => SpotRowReader,
  batchRows: number,
): AsyncGenerator<Batch, void, void> {
  const file = createFileReader(record.mapping);
  let readRow: SpotRowReader | null = null;
  let rowNo = 0;
  let share = 0;
  let batch = emptyBatch();

  function take(recordOfFile: FileRecord): void {
    readRow ??= compile(file.header);
    const outcome = readRow(recordOfFile);
    rowNo++;
    // Stored and counted by an earlier attempt.
    if (rowNo <= record.counts.rowsRead) return;
    batch.rowsRead++;
    if (outcome === 'other receiver') return;
    if (isFieldRefusal(outcome)) {
      const { lineNo, raw } = recordOfFile;
      batch.refusals.push({ lineNo, field: outcome.field, reason: outcome.reason, raw });
    } else batch.spots.push(outcome);
  }

  function takeBatch(): Batch {
    const full = { ...batch, bytesDone: Math.floor(share * record.sizeBytes) };
    batch = emptyBatch();
    return full;
  }

  try {
    for await (const piece of readImportFile(context.dataSource, record)) {
      context.signal.throwIfAborted();
      for (const found of file.push(piece.bytes)) {
        take(found);
        if (batch.rowsRead >= batchRows) yield takeBatch();
      }
      share = piece.share;
    }
  } catch (error) {
    // What came before the damage is kept.
    if (error instanceof UnreadableFile && batch.rowsRead > 0) yield takeBatch();
    throw error;
  }
  for (const found of file.end()) take(found);
  // A file of a header alone says nothing wrong; one that lacks its columns does.
  readRow ??= compile(file.header);
  if (batch.rowsRead > 0) yield takeBatch();
}

function emptyBatch(): Batch {
  return { rowsRead: 0, spots: [], refusals: [], bytesDone: 0 };
}

function timeRange(spots: readonly SpotRow[]): [Date, Date] {
  let first = Infinity;
  let last = -Infinity;
  for (const { heardAtMs } of spots) {
    if (heardAtMs < first) first = heardAtMs;
    if (heardAtMs > last) last = heardAtMs;
  }
  return [new Date(first), new Date(last)];
}
