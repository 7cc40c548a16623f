import { MappingError } from '../../shared/imports/reading.ts';
import { loadReadingContext } from '../../server/database/import-context.ts';
import { UnreadableFile } from '../../server/database/import-file.ts';
import { JobStopped, type JobContext, type JobHandler } from '../jobs/job-handler.ts';
import { importDwells } from './dwell-import.ts';
import { ImportTaken } from './import-progress.ts';
import { beginImport, cancelImport, failImport, type RunningImport } from './import-record.ts';
import { importSpots, type ImportLimits } from './spot-import.ts';

/** Makes the handler that reads an uploaded file under its mapping and stores what it says. */
export function createImportJob(limits: ImportLimits): JobHandler<'import'> {
  return async (context) => {
    const record = await beginImport(context);
    if (record === null) return;
    try {
      await read(context, record, limits);
    } catch (error) {
      await explain(context, record, error);
    }
  };
}

/** Batches of this size are stored a third faster than half of it; larger ones only need more memory. */
export const usualLimits: ImportLimits = { mostRefusals: 1_000_000, batchRows: 50_000 };
export const runImportJob = createImportJob(usualLimits);

async function read(
  context: JobContext<'import'>,
  record: RunningImport,
  limits: ImportLimits,
): Promise<void> {
  const reading = await loadReadingContext(context.dataSource.manager, record.stationId, Date.now());
  const { mapping } = record;
  if (mapping.kind === 'spots') await importSpots(context, record, mapping, reading, limits);
  else await importDwells(context, record, mapping, reading);
}

/** What a person can mend ends the import with a sentence; all else is thrown on, and tried again. */
async function explain(context: JobContext<'import'>, record: RunningImport, error: unknown): Promise<void> {
  if (error instanceof UnreadableFile || error instanceof MappingError) {
    await failImport(context, error.message);
  }
  // Cancelled through the import itself: it says so already, and its rows are being taken back.
  if (error instanceof ImportTaken) return;
  const reason: unknown = context.signal.aborted ? context.signal.reason : error;
  if (reason instanceof JobStopped && reason.why === 'cancelled') {
    await cancelImport(context.dataSource, record.stationId, record.importId);
  }
  throw error;
}
