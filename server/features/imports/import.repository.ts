import type { EntityManager } from 'typeorm';
import type { ImportKind, ImportMapping } from '../../../shared/contracts/import.ts';
import { ImportRecord } from '../../database/entities/import-record.ts';
import { SavedMapping } from '../../database/entities/saved-mapping.ts';

/** [rows, count]: what TypeORM gives back for UPDATE ... RETURNING. */
type Returned<Row = unknown> = [Row[], number];

export const importRepository = {
  async begin(
    manager: EntityManager,
    record: Pick<ImportRecord, 'stationId' | 'kind' | 'createdBy'>,
  ): Promise<number> {
    const row = await manager.save(
      manager.create(ImportRecord, { ...record, fileName: '', state: 'uploading' }),
    );
    return row.id;
  },

  async storeChunk(
    manager: EntityManager,
    stationId: number,
    importId: number,
    chunkNo: number,
    data: Buffer,
  ): Promise<void> {
    await manager.query(
      'INSERT INTO import_chunk (station_id, import_id, chunk_no, data) VALUES ($1, $2, $3, $4)',
      [stationId, importId, chunkNo, data],
    );
  },

  async complete(
    manager: EntityManager,
    stationId: number,
    importId: number,
    file: { fileName: string; sizeBytes: number; sha256: Buffer },
  ): Promise<boolean> {
    const result = await manager.update(
      ImportRecord,
      { stationId, id: importId, state: 'uploading' },
      { ...file, state: 'uploaded' },
    );
    return result.affected === 1;
  },

  /** The record and, by its foreign keys, the chunks. */
  async discardUpload(manager: EntityManager, stationId: number, importId: number): Promise<void> {
    await manager.delete(ImportRecord, { stationId, id: importId, state: 'uploading' });
  },

  /** Locked until the caller's transaction ends: two requests about one import go one after the other. */
  async lock(manager: EntityManager, stationId: number, importId: number): Promise<ImportRecord | null> {
    return manager.findOne(ImportRecord, {
      where: { stationId, id: importId },
      lock: { mode: 'pessimistic_write' },
    });
  },

  /** Everything of an earlier reading goes: its counts and refusals say nothing of the new one. */
  async queue(
    manager: EntityManager,
    stationId: number,
    importId: number,
    mapping: ImportMapping,
  ): Promise<void> {
    await manager.query('DELETE FROM import_refusal WHERE station_id = $1 AND import_id = $2', [
      stationId,
      importId,
    ]);
    await manager.query(
      `UPDATE import SET state = 'queued', mapping = $3, error = NULL, rows_read = 0, rows_stored = 0,
         rows_doubled = 0, rows_refused = 0, rows_undone = 0, bytes_done = 0, first_at = NULL, last_at = NULL,
         started_at = NULL, finished_at = NULL
       WHERE station_id = $1 AND id = $2`,
      [stationId, importId, JSON.stringify(mapping)],
    );
  },

  /**
   * From here on no batch of it can be stored any more: each one is stored only while its import is
   * running. Returns how many rows have to be taken back.
   */
  async cancel(manager: EntityManager, stationId: number, importId: number): Promise<number> {
    await manager.query(
      `UPDATE job SET cancel_requested = true,
         state = CASE WHEN state = 'queued' THEN 'cancelled' ELSE state END,
         finished_at = CASE WHEN state = 'queued' THEN now() ELSE finished_at END
       WHERE station_id = $1 AND kind = 'import' AND state IN ('queued', 'running')
         AND (payload ->> 'importId')::integer = $2`,
      [stationId, importId],
    );
    const [rows]: Returned<{ rows_stored: number }> = await manager.query(
      `UPDATE import SET state = 'cancelled', finished_at = now()
       WHERE station_id = $1 AND id = $2 RETURNING rows_stored`,
      [stationId, importId],
    );
    return rows[0]?.rows_stored ?? 0;
  },

  /** Where the latest taking back of an import stands: null when there was none, or it is over. */
  async takingBack(
    manager: EntityManager,
    stationId: number,
    importId: number,
  ): Promise<'at work' | 'failed' | null> {
    const rows: { state: string }[] = await manager.query(
      `SELECT state FROM job WHERE station_id = $1 AND kind = 'import-undo'
         AND (payload ->> 'importId')::integer = $2 ORDER BY id DESC LIMIT 1`,
      [stationId, importId],
    );
    const state = rows[0]?.state;
    if (state === 'queued' || state === 'running') return 'at work';
    return state === 'dead' || state === 'cancelled' ? 'failed' : null;
  },

  async saveMapping(
    manager: EntityManager,
    stationId: number,
    given: { kind: ImportKind; name: string; mapping: ImportMapping; createdBy: string | null },
  ): Promise<SavedMapping> {
    const [row]: { id: number }[] = await manager.query(
      `INSERT INTO saved_mapping (station_id, kind, name, mapping, created_by) VALUES ($1, $2, $3, $4, $5)
       ON CONFLICT (station_id, kind, lower(name)) DO UPDATE SET name = EXCLUDED.name, mapping = EXCLUDED.mapping
       RETURNING id`,
      [stationId, given.kind, given.name, JSON.stringify(given.mapping), given.createdBy],
    );
    return manager.findOneByOrFail(SavedMapping, { stationId, id: row!.id });
  },

  async removeMapping(manager: EntityManager, stationId: number, id: number): Promise<boolean> {
    const result = await manager.delete(SavedMapping, { stationId, id });
    return result.affected === 1;
  },
};
