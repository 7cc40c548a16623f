import { randomUUID } from 'node:crypto';
import type { EntityManager } from 'typeorm';
import type { DwellMapping } from '../../shared/contracts/import.ts';
import type { FileRecord } from '../../shared/imports/delimited.ts';
import { planDwells, type DwellPlan } from '../../shared/imports/dwell-plan.ts';
import { createDwellRowReader, type DwellRow } from '../../shared/imports/dwell-rows.ts';
import { createFileReader } from '../../shared/imports/file-reader.ts';
import type { ReadingContext } from '../../shared/imports/reading.ts';
import { loadLoggedDwells, loadReadingContext } from '../../server/database/import-context.ts';
import { readImportFile } from '../../server/database/import-file.ts';
import { inTransaction } from '../../server/database/transaction.ts';
import { publish } from '../../server/platform/notify.ts';
import type { JobContext } from '../jobs/job-handler.ts';
import {
  insertDwells,
  lockReceivers,
  makeNames,
  markStretchesDirty,
  type StoredDwell,
} from './dwell-store.ts';
import { ImportTaken, recordStep } from './import-progress.ts';
import { endImport, failImport, type RunningImport } from './import-record.ts';
import { copyRefusals, type LineRefusal } from './refusal-copy.ts';

/** Years of switching every few minutes; what is read is planned, and stored, as one. */
export const mostDwellRows = 200_000;

/** Stores the dwells of a file in one transaction: the switch log is never half of one file. */
export async function importDwells(
  context: JobContext<'import'>,
  record: RunningImport,
  mapping: DwellMapping,
  reading: ReadingContext,
): Promise<void> {
  const { records, header } = await readRecords(context, record, mapping);
  // Says what is wrong with the mapping before anything is locked.
  createDwellRowReader(mapping, header, reading);
  await inTransaction(context.dataSource, async (manager) => {
    await context.assertOurs(manager);
    await lockReceivers(manager, record.stationId);
    await store(manager, record, mapping, records, header, reading.nowMs);
    context.signal.throwIfAborted();
  });
  context.progress(record.sizeBytes, record.sizeBytes);
}

async function readRecords(
  context: JobContext<'import'>,
  record: RunningImport,
  mapping: DwellMapping,
): Promise<{ records: FileRecord[]; header: readonly string[] | null }> {
  const file = createFileReader(mapping);
  const records: FileRecord[] = [];
  for await (const { bytes, share } of readImportFile(context.dataSource, record)) {
    context.signal.throwIfAborted();
    records.push(...file.push(bytes));
    if (records.length > mostDwellRows) {
      await failImport(context, `A switch log may have at most ${mostDwellRows} lines; split the file.`);
    }
    context.progress(Math.floor(share * record.sizeBytes), record.sizeBytes);
  }
  records.push(...file.end());
  return { records, header: file.header };
}

async function store(
  manager: EntityManager,
  record: RunningImport,
  mapping: DwellMapping,
  records: readonly FileRecord[],
  header: readonly string[] | null,
  nowMs: number,
): Promise<void> {
  const { stationId, importId } = record;
  // Read again under the lock: receivers and antennas may have come since.
  const reading = await loadReadingContext(manager, stationId, nowMs);
  const readRow = createDwellRowReader(mapping, header, reading);
  const rows: DwellRow[] = [];
  const refusals: LineRefusal[] = [];
  for (const { lineNo, raw, ...rest } of records) {
    const { row, refusal } = readRow({ lineNo, raw, ...rest });
    if (row !== null) rows.push(row);
    if (refusal !== null) refusals.push({ lineNo, raw, ...refusal });
  }
  const plan = await planBesideLog(manager, stationId, rows, reading);
  refusals.push(...plan.refusals);
  refusals.sort((a, b) => a.lineNo - b.lineNo);

  const dwells = await resolve(manager, stationId, plan);
  await insertDwells(manager, record, randomUUID(), dwells);
  await markStretchesDirty(manager, stationId, dwells);
  await recordStep(manager, record, record.counts.rowsRead, {
    rowsRead: records.length,
    rowsStored: dwells.length,
    rowsDoubled: plan.doubledLines.length,
    rowsRefused: refusals.length,
    bytesDone: record.sizeBytes,
    firstAt: dateOf(
      dwells.map(({ startMs }) => startMs),
      Math.min,
    ),
    lastAt: dateOf(
      dwells.map(({ startMs, endMs }) => endMs ?? startMs),
      Math.max,
    ),
  });
  await copyRefusals(manager, stationId, importId, refusals);
  if (!(await endImport(manager, stationId, importId))) throw new ImportTaken('The import was cancelled.');
  await publish(manager, stationId, {
    type: 'switch',
    receiverIds: [...new Set(dwells.map(({ receiverId }) => receiverId))],
  });
  const hasMade = plan.newReceivers.length + plan.newAntennas.length > 0;
  if (hasMade) await publish(manager, stationId, { type: 'station' });
}

async function planBesideLog(
  manager: EntityManager,
  stationId: number,
  rows: readonly DwellRow[],
  reading: ReadingContext,
): Promise<DwellPlan> {
  const receiverIds = new Set(rows.flatMap(({ receiver }) => ('id' in receiver ? [receiver.id] : [])));
  const firstMs = rows.reduce((first, { startMs }) => Math.min(first, startMs), Infinity);
  const logged =
    receiverIds.size === 0 ? [] : await loadLoggedDwells(manager, stationId, [...receiverIds], firstMs);
  const names = new Map(reading.antennas.map(({ id, name }) => [id, name]));
  return planDwells(rows, logged, (id) => names.get(id) ?? '');
}

async function resolve(manager: EntityManager, stationId: number, plan: DwellPlan): Promise<StoredDwell[]> {
  const made = await makeNames(manager, stationId, plan.newReceivers, plan.newAntennas);
  return plan.dwells.map(({ receiver, antenna, startMs, endMs, note }) => ({
    receiverId: 'id' in receiver ? receiver.id : made.receivers.get(receiver.make.toLowerCase())!,
    antennaId: 'id' in antenna ? antenna.id : made.antennas.get(antenna.make.toLowerCase())!,
    startMs,
    endMs,
    note,
  }));
}

/** Not Math.min(...values): a call holds no hundred thousand arguments. */
function dateOf(values: readonly number[], pick: (a: number, b: number) => number): Date | null {
  return values.length === 0 ? null : new Date(values.reduce((a, b) => pick(a, b)));
}
