import type { DataSource } from 'typeorm';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, it, vi } from 'vitest';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { enqueueJob } from '../../server/platform/job-queue.ts';
import { createLogger } from '../../server/platform/logger.ts';
import { runBearingsJob } from '../../worker/bearings/bearings.job.ts';
import { JobRefused, type JobHandler, type JobHandlers } from '../../worker/jobs/job-handler.ts';
import { createJobRunner, type JobRunner, type JobRunnerOptions } from '../../worker/jobs/job-runner.ts';
import { createTestDatabase, type TestDatabase } from '../helpers/database.ts';
import { insertStation } from '../helpers/station-rows.ts';

const logger = createLogger('test', process.env.TEST_LOG_LEVEL ?? 'silent');

let database: TestDatabase;
let dataSource: DataSource;
let stationId: number;
let runners: JobRunner[] = [];

beforeAll(async () => {
  database = await createTestDatabase();
  dataSource = await connectDataSource(createDataSource({ url: database.url, poolSize: 20 }));
});
afterAll(async () => {
  await dataSource.destroy();
  await database.drop();
});
beforeEach(async () => {
  await dataSource.query('DELETE FROM job');
  ({ stationId } = await insertStation(dataSource));
});
afterEach(async () => {
  await Promise.all(runners.map((runner) => runner.stop()));
  runners = [];
});

function run(handlers: JobHandlers, change: Partial<JobRunnerOptions> = {}): JobRunner {
  const runner = createJobRunner({
    dataSource,
    logger,
    handlers,
    workerName: `worker ${runners.length}`,
    pollSeconds: 0.1,
    heartbeatSeconds: 0.1,
    retrySeconds: 0.05,
    ...change,
  });
  runners.push(runner);
  runner.start();
  return runner;
}

const enqueue = (importId = 1) => enqueueJob(dataSource.manager, stationId, 'import', { importId });

interface JobRow {
  state: string;
  attempts: number;
  error: string | null;
  progress: { done: number; total: number; secondsLeft: number | null } | null;
  claimed_by: string | null;
  finished_at: Date | null;
}

async function readJob(id: number): Promise<JobRow> {
  const rows: JobRow[] = await dataSource.query('SELECT * FROM job WHERE id = $1', [id]);
  return rows[0]!;
}

const until = (id: number, wanted: object) =>
  vi.waitFor(async () => expect(await readJob(id)).toMatchObject(wanted), { timeout: 20_000, interval: 50 });

const forEver = (signal: AbortSignal): Promise<never> =>
  new Promise((_resolve, reject) => {
    signal.addEventListener('abort', () => reject(signal.reason as Error));
  });

describe('the job runner', () => {
  it('runs each of many jobs once over several workers', async () => {
    const ids: number[] = [];
    for (let importId = 1; importId <= 40; importId++) ids.push(await enqueue(importId));
    const seen: number[] = [];
    const handler: JobHandler<'import'> = async ({ job }) => {
      seen.push(job.payload.importId);
    };
    for (let i = 0; i < 4; i++) run({ import: handler }, { concurrency: 3 });
    for (const id of ids) await until(id, { state: 'done', attempts: 1, error: null, claimed_by: null });
    expect(seen.sort((a, b) => a - b)).toEqual(Array.from({ length: 40 }, (_, i) => i + 1));
  });

  it('leaves kinds that it has no handler for to others', async () => {
    const undo = await enqueueJob(dataSource.manager, stationId, 'import-undo', { importId: 1 });
    const other = await enqueue();
    run({ import: async () => undefined });
    await until(other, { state: 'done' });
    expect((await readJob(undo)).state).toBe('queued');
  });

  it('tries a failed job again, and gives it up after its last attempt with the sentence of the failure', async () => {
    const id = await enqueue();
    let attempts = 0;
    run({
      import: async () => {
        attempts += 1;
        throw new Error(`Attempt ${attempts} failed.`);
      },
    });
    await until(id, { state: 'dead', attempts: 5, error: 'Attempt 5 failed.' });
    expect((await readJob(id)).finished_at).toBeInstanceOf(Date);
    expect(attempts).toBe(5);
  });

  it('forgets the failure when a later attempt succeeds', async () => {
    const id = await enqueue();
    run({
      import: async ({ job }) => {
        if (job.attempt < 3) throw new Error('Not yet.');
      },
    });
    await until(id, { state: 'done', attempts: 3, error: null });
  });

  it('does not try again what a handler refuses', async () => {
    const id = await enqueue();
    run({
      import: async () => {
        throw new JobRefused('The file is no text.');
      },
    });
    await until(id, { state: 'dead', attempts: 1, error: 'The file is no text.' });
  });

  it('stops a running job that is cancelled', async () => {
    const id = await enqueue();
    run({ import: ({ signal }) => forEver(signal) });
    await until(id, { state: 'running' });
    await dataSource.query('UPDATE job SET cancel_requested = true WHERE id = $1', [id]);
    await until(id, { state: 'cancelled' });
  });

  it('puts a job back without counting the attempt when the worker stops, and another goes on', async () => {
    const id = await enqueue();
    const first = run({ import: ({ signal }) => forEver(signal) });
    await until(id, { state: 'running' });
    await first.stop();
    expect(await readJob(id)).toMatchObject({ state: 'queued', attempts: 0, error: null });
    run({ import: async () => undefined });
    await until(id, { state: 'done', attempts: 1 });
  });

  it('takes over the job of a worker that is not heard of, whose late writes then change nothing', async () => {
    const id = await enqueue();
    let wakeFirst: () => void = () => undefined;
    const sleeping = new Promise<void>((resolve) => {
      wakeFirst = resolve;
    });
    let lateWrite: unknown = null;
    const first = run(
      {
        import: async ({ assertOurs }) => {
          await sleeping;
          lateWrite = await dataSource.transaction(assertOurs).catch((error: unknown) => error);
        },
      },
      // A heart that never beats stands for a process that hangs.
      { workerName: 'hanging', heartbeatSeconds: 3_600, pollSeconds: 3_600 },
    );
    await until(id, { state: 'running', claimed_by: 'hanging' });
    await dataSource.query(`UPDATE job SET heartbeat_at = now() - interval '1 minute' WHERE id = $1`, [id]);
    let release: () => void = () => undefined;
    const held = new Promise<void>((resolve) => {
      release = resolve;
    });
    run(
      {
        import: async ({ assertOurs }) => {
          await dataSource.transaction(assertOurs);
          await held;
        },
      },
      { workerName: 'second' },
    );
    await until(id, { state: 'running', claimed_by: 'second', attempts: 2 });
    wakeFirst();
    await first.stop();
    expect(lateWrite).toMatchObject({ name: 'JobStopped', why: 'lost' });
    expect(await readJob(id)).toMatchObject({ state: 'running', claimed_by: 'second', attempts: 2 });
    release();
    await until(id, { state: 'done', attempts: 2 });
  });

  it('gives up a job that ends its worker each time', async () => {
    const id = await enqueue();
    await dataSource.query(
      `UPDATE job SET state = 'running', attempts = 5, claimed_by = 'dead', heartbeat_at = now() - interval '1 minute'
       WHERE id = $1`,
      [id],
    );
    run({ import: async () => undefined });
    await until(id, {
      state: 'dead',
      error: 'The worker stopped without a word in the last of 5 attempts.',
    });
  });

  it('keeps its job through the pauses of a slow handler by its heartbeat', async () => {
    const id = await enqueue();
    let release: () => void = () => undefined;
    const held = new Promise<void>((resolve) => {
      release = resolve;
    });
    run({ import: () => held }, { workerName: 'slow', deadAfterSeconds: 1 });
    await until(id, { state: 'running' });
    const before: { at: Date }[] = await dataSource.query(
      'SELECT heartbeat_at AS at FROM job WHERE id = $1',
      [id],
    );
    run({ import: async () => undefined }, { deadAfterSeconds: 1 });
    await vi.waitFor(
      async () => {
        const rows: { late: boolean }[] = await dataSource.query(
          `SELECT heartbeat_at > $2::timestamptz + interval '1500 milliseconds' AS late FROM job WHERE id = $1`,
          [id, before[0]!.at],
        );
        expect(rows[0]!.late).toBe(true);
      },
      { timeout: 20_000, interval: 100 },
    );
    expect(await readJob(id)).toMatchObject({ state: 'running', claimed_by: 'slow', attempts: 1 });
    release();
    await until(id, { state: 'done' });
  });

  it('writes how far a job is and how long it will take', async () => {
    const id = await enqueue();
    let release: () => void = () => undefined;
    const held = new Promise<void>((resolve) => {
      release = resolve;
    });
    run({
      import: async ({ progress }) => {
        progress(0, 200);
        progress(50, 200);
        await held;
        for (let done = 51; done <= 200; done++) progress(done, 200);
      },
    });
    await until(id, { progress: { done: 50, total: 200, secondsLeft: expect.any(Number) } });
    release();
    await until(id, { state: 'done', progress: { done: 200, total: 200, secondsLeft: 0 } });
  });

  it('ends a job after its database connections were cut in the middle', async () => {
    const id = await enqueue();
    let cut = false;
    run({
      import: async () => {
        if (cut) return;
        cut = true;
        await dataSource.query(
          `SELECT pg_terminate_backend(pid) FROM pg_stat_activity
           WHERE datname = current_database() AND pid <> pg_backend_pid()`,
        );
        await dataSource.query('SELECT pg_terminate_backend(pg_backend_pid())');
      },
    });
    await until(id, { state: 'done' });
  });

  it('does a job again whose end could not be stored for too long', async () => {
    await dataSource.query(`
      CREATE FUNCTION refuse_end() RETURNS trigger LANGUAGE plpgsql AS
        $$ BEGIN RAISE 'no end today'; END $$;
      CREATE TRIGGER no_end BEFORE UPDATE ON job FOR EACH ROW WHEN (NEW.state = 'done') EXECUTE FUNCTION refuse_end()`);
    const id = await enqueue();
    const unstored = new Promise<void>((resolve) => {
      const deaf = createLogger('test', 'silent');
      const listening = Object.assign(Object.create(deaf) as typeof deaf, {
        child: () => deaf,
        error: (_about: object, message: string) => {
          if (message === 'a job could not be ended') resolve();
        },
      });
      let runs = 0;
      run(
        {
          import: async () => {
            runs++;
            if (runs > 1) await dataSource.query('DROP TRIGGER IF EXISTS no_end ON job');
          },
        },
        { deadAfterSeconds: 0.5, logger: listening },
      );
    });
    await unstored;
    // Its heart has stopped: the job is put back, and ends once its end can be stored.
    await until(id, { state: 'done', attempts: 2 });
  });
});

describe('the bearings job', () => {
  it('computes the bearing of every call anew, by the station’s own corrections, the unfit ones left out', async () => {
    await dataSource.query(
      `INSERT INTO call_sign (call) VALUES ('JA1QTC'), ('JA1QTD'), ('W1QRB/MM') ON CONFLICT DO NOTHING`,
    );
    await dataSource.query(
      `INSERT INTO call_bearing (station_id, call_id, source, azimuth_deg)
       SELECT $1, id, 'country', 1 FROM call_sign WHERE call = 'JA1QTC'`,
      [stationId],
    );
    await dataSource.query(
      // JA1QTC at the station's own meridian to the south: bearing 180 by definition.
      `INSERT INTO position_override (station_id, matches, pattern, locator, radius_km)
       VALUES ($1, 'call', 'JA1QTC', 'IK50', 50), ($1, 'prefix', 'JA/X', 'PM95', 50)`,
      [stationId],
    );
    await dataSource.query('UPDATE station SET latitude_deg = 53.5, longitude_deg = -9 WHERE id = $1', [
      stationId,
    ]);
    const id = await enqueueJob(dataSource.manager, stationId, 'bearings', {});
    run({ bearings: runBearingsJob });
    await until(id, { state: 'done' });
    const rows: { call: string; source: string; azimuth_deg: number | null }[] = await dataSource.query(
      `SELECT call, source, azimuth_deg FROM call_bearing JOIN call_sign ON id = call_id
       WHERE station_id = $1 AND call IN ('JA1QTC', 'JA1QTD', 'W1QRB/MM') ORDER BY call`,
      [stationId],
    );
    expect(rows).toMatchObject([
      { call: 'JA1QTC', source: 'locator', azimuth_deg: 180 },
      { call: 'JA1QTD', source: expect.stringMatching(/^(call area|country)$/) },
      { call: 'W1QRB/MM', source: 'none', azimuth_deg: null },
    ]);
    // From Ireland the short path to Tokyo starts north-north-east.
    expect(rows[1]!.azimuth_deg).toBeGreaterThan(20);
    expect(rows[1]!.azimuth_deg).toBeLessThan(50);
  });
});
