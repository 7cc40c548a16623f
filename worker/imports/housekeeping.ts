import type { DataSource } from 'typeorm';
import { publish } from '../../server/platform/notify.ts';
import { cancelImport } from './import-record.ts';

/** Far longer than the server lets an upload last. */
const longestUploadHours = 24;

/**
 * Brings imports back in line with what became of their uploads and jobs: uploads whose server died are
 * cleared away; an import whose job was given up has failed; one whose job was cancelled on its own is
 * cancelled, and what it stored is taken back. For the worker's timed jobs; safe in several workers at once.
 */
export async function settleImports(dataSource: DataSource): Promise<{ cleared: number; settled: number }> {
  const [, cleared]: [unknown, number] = await dataSource.query(
    `DELETE FROM import WHERE state = 'uploading' AND created_at < now() - $1 * interval '1 hour'`,
    [longestUploadHours],
  );
  const astray: { station_id: number; id: number; job_state: string; error: string | null }[] =
    await dataSource.query(
      `SELECT i.station_id, i.id, j.state AS job_state, j.error
       FROM import i
       CROSS JOIN LATERAL (
         SELECT state, error FROM job WHERE station_id = i.station_id AND kind = 'import'
           AND (payload ->> 'importId')::integer = i.id ORDER BY id DESC LIMIT 1) AS j
       WHERE i.state IN ('queued', 'running') AND j.state IN ('dead', 'cancelled')`,
    );
  for (const { station_id: stationId, id: importId, job_state, error } of astray) {
    if (job_state === 'cancelled') await cancelImport(dataSource, stationId, importId);
    else {
      await dataSource.query(
        `UPDATE import SET state = 'failed', error = $3, finished_at = now()
         WHERE station_id = $1 AND id = $2 AND state IN ('queued', 'running')`,
        [
          stationId,
          importId,
          `The import was given up after several tries. The last one ended with: ${error ?? 'no reason'}`,
        ],
      );
      await publish(dataSource.manager, stationId, { type: 'import', importId });
    }
  }
  return { cleared, settled: astray.length };
}
