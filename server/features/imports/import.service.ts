import type { IncomingMessage } from 'node:http';
import type { EntityManager } from 'typeorm';
import type { ImportKind, ImportMapping, ImportPreview } from '../../../shared/contracts/import.ts';
import { splitLine } from '../../../shared/imports/delimited.ts';
import { checkDwellMapping, createDwellRowReader } from '../../../shared/imports/dwell-rows.ts';
import { createFileReader } from '../../../shared/imports/file-reader.ts';
import { guessMapping } from '../../../shared/imports/guess-mapping.ts';
import { previewFile } from '../../../shared/imports/preview.ts';
import { MappingError, type MappingProblem, type ReadingContext } from '../../../shared/imports/reading.ts';
import { checkSpotMapping, createSpotRowReader } from '../../../shared/imports/spot-rows.ts';
import type { ImportRecord } from '../../database/entities/import-record.ts';
import { loadLoggedDwells, loadReadingContext } from '../../database/import-context.ts';
import { inTransaction } from '../../database/transaction.ts';
import type { Deps } from '../../platform/deps.ts';
import { Conflict, InvalidRequest, NotFound } from '../../platform/errors.ts';
import { enqueueJob } from '../../platform/job-queue.ts';
import { publish } from '../../platform/notify.ts';
import { readFileStart } from './import-start.ts';
import { allRefusals, readImport } from './import.read-model.ts';
import { importRepository } from './import.repository.ts';
import { refuseUnknownIds } from './mapping-ids.read-model.ts';
import { receiveUpload } from './receive-upload.ts';

type Audit = (manager: EntityManager, target: string, detail?: Record<string, unknown>) => Promise<void>;

/** States in which nothing of an import is stored and nothing is at work: it may be read (again). */
const readable: readonly ImportRecord['state'][] = ['uploaded', 'undone', 'cancelled', 'failed'];

export function createImportService(deps: Deps) {
  const { dataSource } = deps;

  async function found(stationId: number, importId: number) {
    const record = await readImport(dataSource.manager, stationId, importId);
    if (!record) throw new NotFound('This import');
    return record;
  }

  async function lockedImport(manager: EntityManager, stationId: number, importId: number) {
    const record = await importRepository.lock(manager, stationId, importId);
    if (!record) throw new NotFound('This import');
    return record;
  }

  function contextOf(stationId: number): Promise<ReadingContext> {
    return loadReadingContext(dataSource.manager, stationId, deps.now());
  }

  /** What the file's own header says to the mapping, before anything is queued. */
  async function checkAgainstFile(
    file: { stationId: number; importId: number; sizeBytes: number },
    mapping: ImportMapping,
  ): Promise<void> {
    const context = await contextOf(file.stationId);
    const problems =
      mapping.kind === 'spots' ? checkSpotMapping(mapping, context) : checkDwellMapping(mapping, context);
    if (problems.length > 0) throw badMapping(problems);
    const start = await readFileStart(dataSource, file);
    const reader = createFileReader(mapping);
    reader.push(start.bytes);
    if (start.isWhole) reader.end();
    try {
      if (mapping.kind === 'spots') createSpotRowReader(mapping, reader.header, context);
      else createDwellRowReader(mapping, reader.header, context);
    } catch (error) {
      if (error instanceof MappingError) throw badMapping(error.problems);
      throw error;
    }
  }

  return {
    found,

    async upload(
      stationId: number,
      kind: ImportKind,
      createdBy: string | null,
      req: IncomingMessage,
      audit: Audit,
    ) {
      const importId = await importRepository.begin(dataSource.manager, { stationId, kind, createdBy });
      try {
        const file = await receiveUpload(req, (chunkNo, data) =>
          importRepository.storeChunk(dataSource.manager, stationId, importId, chunkNo, data),
        );
        await inTransaction(dataSource, async (manager) => {
          const completed = await importRepository.complete(manager, stationId, importId, file);
          if (!completed) throw new Conflict('The upload took too long and was cleared away. Send it again.');
          const { fileName, sizeBytes } = file;
          await audit(manager, String(importId), { kind, fileName, sizeBytes });
          await publish(manager, stationId, { type: 'import', importId });
        });
      } catch (error) {
        // A failure of this one must not hide the reason; what it leaves is cleared away by the worker.
        await importRepository
          .discardUpload(dataSource.manager, stationId, importId)
          .catch((failure: unknown) =>
            deps.logger.warn({ err: failure }, 'a broken upload could not be removed'),
          );
        throw error;
      }
      return found(stationId, importId);
    },

    async preview(
      stationId: number,
      importId: number,
      mapping: ImportMapping | undefined,
    ): Promise<ImportPreview> {
      const record = await found(stationId, importId);
      if (record.state === 'uploading') throw new Conflict('The file has not arrived as a whole yet.');
      const context = await contextOf(stationId);
      const { sizeBytes } = record;
      const start = await readFileStart(dataSource, { stationId, importId, sizeBytes });
      const guess = guessMapping(start.bytes, record.kind, context);
      const used = mapping ?? guess;
      checkKind(record.kind, used);
      const logged =
        used.kind === 'dwells'
          ? await loadLoggedDwells(
              dataSource.manager,
              stationId,
              context.receivers.map(({ id }) => id),
              0,
            )
          : [];
      return { guess, ...previewFile(start.bytes, start.isWhole, used, context, logged) };
    },

    async start(
      stationId: number,
      importId: number,
      mapping: ImportMapping,
      createdBy: string | null,
      audit: Audit,
    ) {
      const record = await found(stationId, importId);
      checkKind(record.kind, mapping);
      if (record.state === 'uploading') throw new Conflict('The file has not arrived as a whole yet.');
      await checkAgainstFile({ stationId, importId, sizeBytes: record.sizeBytes }, mapping);
      await inTransaction(dataSource, async (manager) => {
        const { state, rowsStored, rowsUndone } = await lockedImport(manager, stationId, importId);
        if (!readable.includes(state)) {
          throw new Conflict(
            state === 'done'
              ? 'This file has been imported. Undo it first to read it under another mapping.'
              : 'This import is at work already.',
          );
        }
        const takingBack = await importRepository.takingBack(manager, stationId, importId);
        if (takingBack === 'at work')
          throw new Conflict('What this import stored is still being taken back.');
        const isLeft = rowsStored > rowsUndone && (state === 'failed' || takingBack === 'failed');
        if (isLeft) throw new Conflict('Undo what this import has stored so far, then start it again.');
        await importRepository.queue(manager, stationId, importId, mapping);
        await enqueueJob(manager, stationId, 'import', { importId }, createdBy);
        await audit(manager, String(importId), { kind: mapping.kind });
        await publish(manager, stationId, { type: 'import', importId });
      });
      return found(stationId, importId);
    },

    async cancel(stationId: number, importId: number, createdBy: string | null, audit: Audit) {
      await inTransaction(dataSource, async (manager) => {
        const { state } = await lockedImport(manager, stationId, importId);
        if (state !== 'queued' && state !== 'running') {
          throw new Conflict('Only an import that waits or runs can be cancelled.');
        }
        const stored = await importRepository.cancel(manager, stationId, importId);
        if (stored > 0) await enqueueJob(manager, stationId, 'import-undo', { importId }, createdBy);
        await audit(manager, String(importId), { rowsStored: stored });
        await publish(manager, stationId, { type: 'import', importId });
      });
      return found(stationId, importId);
    },

    async undo(stationId: number, importId: number, createdBy: string | null, audit: Audit) {
      await inTransaction(dataSource, async (manager) => {
        const { state, rowsStored, rowsUndone } = await lockedImport(manager, stationId, importId);
        const takingBack = await importRepository.takingBack(manager, stationId, importId);
        if (takingBack === 'at work') throw new Conflict('This import is being undone already.');
        const isLeft = state === 'cancelled' && rowsStored > rowsUndone;
        if (state !== 'done' && state !== 'failed' && !isLeft) {
          throw new Conflict('Only an import that has ended and stored something can be undone.');
        }
        await enqueueJob(manager, stationId, 'import-undo', { importId }, createdBy);
        await audit(manager, String(importId), { rowsStored });
        await publish(manager, stationId, { type: 'import', importId });
      });
      return found(stationId, importId);
    },

    /** Header and rows of the download: the file's own columns, so that what is corrected can be sent again. */
    async refusalTable(stationId: number, importId: number) {
      const record = await found(stationId, importId);
      const refusals = allRefusals(dataSource.manager, stationId, importId);
      const { mapping, sizeBytes } = record;
      const about = ['line', 'field', 'reason'];
      let columns: readonly string[] | null = null;
      if (mapping !== null && mapping.layout === 'table' && mapping.format.hasHeader) {
        const reader = createFileReader(mapping);
        reader.push((await readFileStart(dataSource, { stationId, importId, sizeBytes })).bytes);
        columns = reader.header;
      }
      const cellsOf = (raw: string): string[] => {
        if (columns === null || mapping === null) return [raw];
        const cells = splitLine(raw, mapping.format.delimiter, mapping.format.quote);
        // What cannot be taken apart stands whole in the first column.
        return typeof cells === 'string' ? [raw] : cells;
      };
      return {
        fileName: `refused-${importId}.csv`,
        header: [...about, ...(columns ?? ['raw'])],
        rows: (async function* () {
          for await (const { lineNo, field, reason, raw } of refusals) {
            yield [lineNo, field, reason, ...cellsOf(raw).map(asCell)];
          }
        })(),
      };
    },

    async saveMapping(
      stationId: number,
      given: { name: string; mapping: ImportMapping },
      createdBy: string | null,
      audit: Audit,
    ) {
      const { kind } = given.mapping;
      await refuseUnknownIds(dataSource.manager, stationId, given.mapping);
      return inTransaction(dataSource, async (manager) => {
        const row = await importRepository.saveMapping(manager, stationId, { ...given, kind, createdBy });
        await audit(manager, String(row.id), { name: given.name, kind });
        return { id: row.id, kind, name: row.name, mapping: given.mapping };
      });
    },

    async removeMapping(stationId: number, mappingId: number, audit: Audit): Promise<void> {
      await inTransaction(dataSource, async (manager) => {
        const removed = await importRepository.removeMapping(manager, stationId, mappingId);
        if (!removed) throw new NotFound('This mapping');
        await audit(manager, String(mappingId));
      });
    },
  };
}

/** A signed number stays one: as text, the guard against formulas would put an apostrophe before its sign. */
function asCell(text: string): string | number {
  return /^[+-]\d{1,9}$/.test(text) ? Number(text) : text;
}

function checkKind(kind: ImportKind, mapping: ImportMapping): void {
  if (mapping.kind === kind) return;
  throw badMapping([
    { path: 'kind', message: `The file was uploaded as ${kind}, the mapping is for ${mapping.kind}.` },
  ]);
}

function badMapping(problems: readonly MappingProblem[]): InvalidRequest {
  return new InvalidRequest(
    'The mapping does not fit the file.',
    problems.map(({ path, message }) => ({ path: `body.mapping.${path}`, message })),
  );
}
