import { spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { join } from 'node:path';
import { gzipSync } from 'node:zlib';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, it, vi } from 'vitest';
import { cancelImport, type ImportRecord } from '../../shared/contracts/import.ts';
import { guessMapping } from '../../shared/imports/guess-mapping.ts';
import { openStationCluster, type Cluster } from '../../server/launch/cluster.mjs';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { loadReadingContext } from '../../server/database/import-context.ts';
import { migrate } from '../../server/database/migrate.ts';
import { enqueueJob } from '../../server/platform/job-queue.ts';
import { createListener } from '../../server/platform/listener.ts';
import { createLogger } from '../../server/platform/logger.ts';
import { importRepository } from '../../server/features/imports/import.repository.ts';

import { startTestApi, type TestApi } from '../helpers/api.ts';
import {
  insertImportStation,
  madeUpHeader,
  madeUpRow,
  makeImportTools,
  startJobRunner,
} from '../helpers/imports.ts';
import {
  openWorkshop,
  prepareCluster,
  type PreparedCluster,
  type Workshop,
} from '../helpers/launch-workshop.ts';
import { insertStation } from '../helpers/station-rows.ts';
import { Receiver } from '../../server/database/entities/receiver.ts';
import { eventChannel } from '../../shared/contracts/event.ts';

/** What a kill at any moment of an import leaves behind: every row stored once, and counted once. */
const rows = 200_000;
/** Every fiftieth row is refused, every hundredth stands there twice. */
const lines = Array.from({ length: rows }, (_, n) => madeUpRow(n)).flatMap((row, n) =>
  n % 100 === 0 ? [row, row] : n % 50 === 1 ? [row.replace(',CW,', ',CW,x')] : [row],
);
const file = Buffer.from([madeUpHeader, ...lines].join('\n'));
const refused = rows / 50;
const expected = {
  state: 'done',
  error: null,
  rowsRead: lines.length,
  rowsStored: rows - refused,
  rowsDoubled: rows / 100,
  rowsRefused: refused,
};
const isInTheMiddle = ({ state, rowsRead }: ImportRecord) => state === 'running' && rowsRead > 0;

describe('an import whose worker is killed', { timeout: 180_000 }, () => {
  let api: TestApi;
  let tools: ReturnType<typeof makeImportTools>;
  let workers: ChildProcess[];

  beforeAll(async () => {
    api = await startTestApi();
  });
  afterAll(() => api.close());
  beforeEach(async () => {
    workers = [];
    tools = makeImportTools(api, await insertImportStation(api));
  });
  afterEach(async () => {
    for (const worker of workers) await kill(worker);
  });

  async function startWorker(): Promise<ChildProcess> {
    const worker = spawn(process.execPath, ['--import', 'tsx', 'tests/helpers/job-worker.ts'], {
      env: { ...process.env, DATABASE_URL: api.databaseUrl, WORKER_NAME: `worker ${workers.length}` },
      stdio: ['ignore', 'pipe', 'inherit'],
    });
    workers.push(worker);
    await once(worker.stdout!, 'data');
    return worker;
  }

  async function begin(): Promise<number> {
    const { id } = await tools.upload('spots', file);
    await tools.start(id, (await tools.preview(id)).guess);
    return id;
  }

  it('goes on in another worker with exact counts after kill -9, twice', async () => {
    const id = await begin();
    await kill(await startWorker(), tools.until(id, isInTheMiddle));
    const afterFirst = await tools.read(id);
    expect(afterFirst.rowsRead).toBeLessThan(lines.length);
    await kill(
      await startWorker(),
      tools.until(id, ({ rowsRead }) => rowsRead > afterFirst.rowsRead),
    );
    await startWorker();
    const ended = await tools.until(id, ({ state }) => state === 'done' || state === 'failed');
    expect(ended).toMatchObject(expected);
    expect(await countRows(id)).toEqual({ spots: expected.rowsStored, refusals: refused });
  });

  it('is taken back as a whole when it is cancelled in the middle', async () => {
    const id = await begin();
    await startWorker();
    const middle = await tools.until(id, isInTheMiddle);
    expect(middle.rowsRead).toBeLessThan(lines.length);
    const cancelled = await tools.ask<ImportRecord>(cancelImport, { importId: id });
    expect(cancelled.state).toBe('cancelled');
    const settled = await tools.until(id, ({ rowsUndone, rowsStored }) => rowsUndone === rowsStored);
    expect(settled).toMatchObject({ state: 'cancelled', rowsStored: cancelled.rowsStored });
    expect(await countRows(id)).toMatchObject({ spots: 0 });
  });

  async function countRows(importId: number) {
    const [counts] = await api.dataSource.query(
      `SELECT (SELECT count(*) FROM spot WHERE import_id = $1) AS spots,
         (SELECT count(*) FROM import_refusal WHERE import_id = $1) AS refusals`,
      [importId],
    );
    return counts;
  }
});

async function kill(worker: ChildProcess, when: Promise<unknown> = Promise.resolve()): Promise<void> {
  await when;
  if (worker.exitCode !== null || worker.signalCode !== null) return;
  worker.kill('SIGKILL');
  await once(worker, 'exit');
}

describe('an import whose database is killed', { timeout: 180_000 }, () => {
  let prepared: PreparedCluster;
  let workshop: Workshop;
  let cluster: Cluster;

  beforeAll(async () => {
    prepared = await prepareCluster();
    workshop = openWorkshop();
    const home = join(workshop.folder, 'postgres');
    prepared.copyTo(home);
    // The one that `npm start` uses: durable, and started again when it dies.
    cluster = await openStationCluster({ home, say: () => undefined });
    await cluster.ensureDatabase('whichwire');
  });
  afterAll(async () => {
    await cluster.stop();
    await workshop.close();
    prepared.remove();
  });

  it('goes on when the database is up again, with exact counts', async () => {
    await cluster.query('CREATE EXTENSION IF NOT EXISTS btree_gist', 'whichwire');
    const url = cluster.url('whichwire');
    const dataSource = await connectDataSource(createDataSource({ url, poolSize: 6 }));
    await migrate(dataSource);
    const { stationId } = await insertStation(dataSource);
    for (const callSign of ['EI7QSA', 'EI7QSC', 'EI7QSD']) {
      await dataSource.getRepository(Receiver).save({ stationId, callSign, label: callSign });
    }
    const { manager } = dataSource;
    const id = await importRepository.begin(manager, { stationId, kind: 'spots', createdBy: null });
    await importRepository.storeChunk(manager, stationId, id, 0, gzipSync(file, { level: 1 }));
    const about = { fileName: 'log.csv', sizeBytes: file.length, sha256: Buffer.alloc(32) };
    await importRepository.complete(manager, stationId, id, about);
    const reading = await loadReadingContext(manager, stationId, Date.now());
    const mapping = guessMapping(file.subarray(0, 100_000), 'spots', reading);
    await importRepository.queue(manager, stationId, id, mapping);

    let events = 0;
    const listener = createListener({
      url,
      channels: [eventChannel],
      logger: createLogger('test', 'silent'),
      onMessage: (_channel, payload) => {
        // The first tells that the import runs, the second and third that a batch is stored.
        if (!payload.includes('"import"') || ++events !== 3) return;
        process.kill(cluster.pid, 'SIGKILL');
      },
    });
    await enqueueJob(manager, stationId, 'import', { importId: id });
    await listener.start();
    const runner = startJobRunner(dataSource);
    const read = async () => {
      const [row] = await dataSource.query(
        `SELECT state, error, rows_read AS "rowsRead", rows_stored AS "rowsStored", rows_doubled AS "rowsDoubled",
           rows_refused AS "rowsRefused" FROM import WHERE id = $1`,
        [id],
      );
      return row;
    };
    await vi.waitFor(async () => expect((await read()).state).toBe('done'), {
      timeout: 120_000,
      interval: 250,
    });
    expect(events).toBeGreaterThan(3);
    expect(await read()).toEqual(expected);
    const [stored] = await dataSource.query('SELECT count(*) AS spots FROM spot WHERE import_id = $1', [id]);
    expect(stored).toEqual({ spots: expected.rowsStored });
    await runner.stop();
    await listener.stop();
    await dataSource.destroy();
  });
});
