import type { EntityManager } from 'typeorm';
import { publish } from '../../server/platform/notify.ts';

/** Counts of an import, as they stand in its row. */
export interface ImportCounts {
  rowsRead: number;
  rowsStored: number;
  rowsDoubled: number;
  rowsRefused: number;
}

export interface ImportStep extends ImportCounts {
  bytesDone: number;
  /** Earliest and latest of what was stored; null when nothing was. */
  firstAt: Date | null;
  lastAt: Date | null;
}

/** The import is no longer this job's to write: cancelled, or carried on by another worker. */
export class ImportTaken extends Error {
  override name = 'ImportTaken';
}

/**
 * Adds a step's counts to the import, in the transaction that stores the step's rows. The number of rows
 * read so far is also the place at which a restarted job goes on: the step is stored only if that place is
 * where this job believes it to be, so that no row is counted twice or left out. Throws ImportTaken.
 */
export async function recordStep(
  manager: EntityManager,
  target: { stationId: number; importId: number },
  rowsReadBefore: number,
  step: ImportStep,
): Promise<void> {
  const [, count]: [unknown, number] = await manager.query(
    `UPDATE import SET rows_read = rows_read + $4, rows_stored = rows_stored + $5,
       rows_doubled = rows_doubled + $6, rows_refused = rows_refused + $7, bytes_done = greatest(bytes_done, $8),
       first_at = least(first_at, $9::timestamptz), last_at = greatest(last_at, $10::timestamptz)
     WHERE station_id = $1 AND id = $2 AND state = 'running' AND rows_read = $3`,
    [
      target.stationId,
      target.importId,
      rowsReadBefore,
      step.rowsRead,
      step.rowsStored,
      step.rowsDoubled,
      step.rowsRefused,
      step.bytesDone,
      step.firstAt,
      step.lastAt,
    ],
  );
  if (count !== 1) throw new ImportTaken('The import was cancelled, or goes on in another worker.');
  await publish(manager, target.stationId, { type: 'import', importId: target.importId });
}
