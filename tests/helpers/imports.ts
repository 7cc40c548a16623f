import type { DataSource } from 'typeorm';
import {
  listImportRefusals,
  readImport,
  startImport,
  uploadImport,
  type ImportKind,
  type ImportMapping,
  type ImportPreview,
  type ImportRecord,
  previewImport,
} from '../../shared/contracts/import.ts';
import { Receiver } from '../../server/database/entities/receiver.ts';
import { createLogger } from '../../server/platform/logger.ts';
import { runBearingsJob } from '../../worker/bearings/bearings.job.ts';
import { runImportUndoJob } from '../../worker/imports/import-undo.job.ts';
import { createImportJob, usualLimits } from '../../worker/imports/import.job.ts';
import type { JobHandlers } from '../../worker/jobs/job-handler.ts';
import { createJobRunner, type JobRunner } from '../../worker/jobs/job-runner.ts';
import type { TestApi } from './api.ts';
import { insertStation } from './station-rows.ts';

/** Small batches: more moments at which something can go wrong. */
export const importHandlers: JobHandlers = {
  import: createImportJob({ ...usualLimits, batchRows: 10_000 }),
  'import-undo': runImportUndoJob,
  bearings: runBearingsJob,
};

/** The worker's own job runner in this process; looks at the table every tenth of a second. */
export function startJobRunner(
  dataSource: DataSource,
  workerName = 'test worker',
  handlers: JobHandlers = {},
): JobRunner {
  const runner = createJobRunner({
    dataSource,
    logger: createLogger('test', process.env.TEST_LOG_LEVEL ?? 'silent'),
    handlers: { ...importHandlers, ...handlers },
    workerName,
    pollSeconds: 0.1,
    heartbeatSeconds: 0.2,
    // Long enough for a busy machine: a worker taken for dead by mistake costs the job one of its tries.
    deadAfterSeconds: 5,
    retrySeconds: 0.2,
  });
  runner.start();
  return runner;
}

export interface ImportStation {
  stationId: number;
  token: string;
  receivers: Record<'EI7QSA' | 'EI7QSC' | 'EI7QSD', number>;
  antennaIds: [number, number];
}

/** A station with three skimmers and an operator's token. */
export async function insertImportStation(api: TestApi): Promise<ImportStation> {
  const { stationId, antennaIds } = await insertStation(api.dataSource);
  const receivers = {} as ImportStation['receivers'];
  for (const callSign of ['EI7QSA', 'EI7QSC', 'EI7QSD'] as const) {
    const row = await api.dataSource.getRepository(Receiver).save({ stationId, callSign, label: callSign });
    receivers[callSign] = row.id;
  }
  const { token } = await api.addPerson(stationId, 'operator');
  return { stationId, token, receivers, antennaIds };
}

export function makeImportTools(api: TestApi, station: { stationId: number; token: string }) {
  const { stationId, token } = station;

  async function ask<Reply>(
    endpoint: Parameters<TestApi['call']>[0],
    options: { importId?: number; body?: unknown; query?: Record<string, unknown> } = {},
  ): Promise<Reply> {
    const { importId, body, query } = options;
    const params: Record<string, number> = importId === undefined ? { stationId } : { stationId, importId };
    const reply = await api.call(endpoint, { token, params, body: body as never, query: query as never });
    if (reply.status >= 300)
      throw new Error(`${endpoint.method} ${endpoint.path}: ${reply.status} ${reply.text}`);
    return reply.body as Reply;
  }

  const tools = {
    ask,
    upload(kind: ImportKind, content: Buffer | string, name = 'log.csv'): Promise<ImportRecord> {
      const form = new FormData();
      form.append('file', new Blob([Buffer.from(content)]), name);
      return ask<ImportRecord>(uploadImport, { query: { kind }, body: form });
    },
    preview(importId: number, mapping?: ImportMapping): Promise<ImportPreview> {
      return ask<ImportPreview>(previewImport, { importId, body: { mapping } });
    },
    read(importId: number): Promise<ImportRecord> {
      return ask<ImportRecord>(readImport, { importId });
    },
    start(importId: number, mapping: ImportMapping): Promise<ImportRecord> {
      return ask<ImportRecord>(startImport, { importId, body: { mapping } });
    },
    /** Waits for the import's own event until it is in one of the states. */
    async until(importId: number, isReached: (record: ImportRecord) => boolean): Promise<ImportRecord> {
      for (;;) {
        const next = nextImportEvent(importId);
        const record = await tools.read(importId);
        if (isReached(record)) {
          next.stop();
          return record;
        }
        await next.promise;
      }
    },
    /** Upload, the guessed mapping (or a change of it), start, end. */
    async run(
      kind: ImportKind,
      content: Buffer | string,
      change: (guess: ImportMapping) => ImportMapping = (guess) => guess,
    ): Promise<ImportRecord> {
      const { id } = await tools.upload(kind, content);
      const { guess } = await tools.preview(id);
      await tools.start(id, change(guess));
      return tools.until(id, hasEnded);
    },
    async refusals(importId: number) {
      const reply = await ask<{
        items: { lineNo: number; field: string | null; reason: string; raw: string }[];
        reasons: { reason: string; lines: number }[];
      }>(listImportRefusals, { importId, query: { limit: 500 } });
      return reply;
    },
  };

  function nextImportEvent(importId: number) {
    let stop: () => void = () => undefined;
    const promise = new Promise<void>((resolve) => {
      stop = api.deps.eventHub.subscribe(stationId, (event) => {
        if (event.type !== 'import' || event.importId !== importId) return;
        stop();
        resolve();
      });
    });
    return { promise, stop: () => stop() };
  }

  return tools;
}

export function hasEnded(record: ImportRecord): boolean {
  return ['done', 'failed', 'cancelled', 'undone'].includes(record.state);
}

/** Rows of a made-up skimmer log, each another spot: one a second. `n` counts from 0. */
export function madeUpRow(n: number): string {
  const time = new Date(Date.UTC(2026, 0, 5, 16) + n * 1000).toISOString().replace('.000Z', 'Z');
  const receiver = ['EI7QSA', 'EI7QSC', 'EI7QSD'][n % 3];
  const call = `${['EA8', 'W1', 'JA1', 'ZL2', 'PY2'][n % 5]}Q${'RSTU'[n % 4]}${'ABCDEFGHIJKLM'[n % 13]}`;
  const khz = (1810 + (n % 900) / 10).toFixed(1);
  return `${time},${receiver},${call},${khz},CW,${5 + (n % 40)},${18 + (n % 15)}`;
}
export const madeUpHeader = 'utc,rx,call,khz,mode,snr_db,wpm';
