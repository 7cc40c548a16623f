import type { DataSource } from 'typeorm';
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { createLogger } from '../../server/platform/logger.ts';
import { keepHouse } from '../../worker/jobs/housekeeping.ts';
import { createRunCoordinator, startTimedJobs } from '../../worker/jobs/timed-jobs.ts';
import { createTestDatabase, type TestDatabase } from '../helpers/database.ts';
import { insertFeedStation } from '../helpers/feed.ts';

const logger = createLogger('test', process.env.TEST_LOG_LEVEL ?? 'silent');

let database: TestDatabase;
let dataSource: DataSource;

beforeAll(async () => {
  database = await createTestDatabase();
  dataSource = await connectDataSource(createDataSource({ url: database.url }));
});
afterAll(async () => {
  await dataSource.destroy();
  await database.drop();
});

describe('timed jobs', () => {
  it('run once a tick over three workers', async () => {
    const runs: string[] = [];
    const workers = ['a', 'b', 'c'].map((workerName) =>
      startTimedJobs({
        dataSource,
        logger,
        workerName,
        jobs: [
          {
            name: 'every second',
            schedule: '* * * * * *',
            run: async () => {
              runs.push(workerName);
            },
          },
        ],
      }),
    );
    await vi.waitFor(() => expect(runs.length).toBeGreaterThanOrEqual(3), { timeout: 20_000 });
    await Promise.all(workers.map((worker) => worker.stop()));
    const ticks: { n: number }[] = await dataSource.query(
      `SELECT count(*) AS n FROM timed_run WHERE name = 'every second'`,
    );
    expect(ticks[0]!.n).toBe(runs.length);
  });

  it('give each tick to one of two workers, and the next tick anew', async () => {
    const [a, b] = ['a', 'b'].map((name) => createRunCoordinator(dataSource, name));
    const key = 'nightly: with a colon:2026-01-05T03:00:00.000Z';
    const answers = await Promise.all([a!.shouldRun(key), b!.shouldRun(key), a!.shouldRun(key)]);
    expect(answers.filter(Boolean)).toHaveLength(1);
    expect(await b!.shouldRun('nightly: with a colon:2026-01-06T03:00:00.000Z')).toBe(true);
  });
});

describe('housekeeping', () => {
  it('clears away what is long over and keeps what is not', async () => {
    const users: { id: string }[] = await dataSource.query(
      `INSERT INTO app_user (email, name, password_hash) VALUES ('a@station.example', 'A', '-') RETURNING id`,
    );
    const userId = users[0]!.id;
    await dataSource.query(
      `INSERT INTO session (user_id, user_agent, expires_at, revoked_at) VALUES
         ($1, 'expired long ago', now() - interval '31 days', NULL),
         ($1, 'revoked long ago', now() + interval '1 day', now() - interval '31 days'),
         ($1, 'expired lately', now() - interval '1 day', NULL),
         ($1, 'open', now() + interval '1 day', NULL)`,
      [userId],
    );
    await dataSource.query(
      `INSERT INTO rate_limit (key, points, expire) VALUES
         ('over', 1, (extract(epoch FROM now()) - 7200) * 1000),
         ('counting', 1, (extract(epoch FROM now()) + 60) * 1000),
         ('for ever', 1, NULL)`,
    );
    await dataSource.query(
      `INSERT INTO timed_run (name, tick, claimed_by) VALUES
         ('old', now() - interval '8 days', 'a'), ('new', now(), 'a')`,
    );
    const { stationId, feedId } = await insertFeedStation(dataSource, 7373);
    await dataSource.query(
      `INSERT INTO feed_refusal (station_id, feed_id, received_at, reason, raw)
       SELECT $1, $2, now(), 'Because.', n::text FROM generate_series(1, 10003) n`,
      [stationId, feedId],
    );
    await keepHouse(dataSource);
    const read = async (query: string): Promise<unknown[]> => {
      const rows: { value: unknown }[] = await dataSource.query(query);
      return rows.map(({ value }) => value);
    };
    expect(await read('SELECT user_agent AS value FROM session ORDER BY 1')).toEqual([
      'expired lately',
      'open',
    ]);
    expect(await read('SELECT key AS value FROM rate_limit ORDER BY 1')).toEqual(['counting', 'for ever']);
    expect(await read(`SELECT name AS value FROM timed_run WHERE name IN ('old', 'new')`)).toEqual(['new']);
    expect(await read('SELECT count(*) AS value FROM feed_refusal')).toEqual([10_000]);
    expect(await read('SELECT min(raw::integer) AS value FROM feed_refusal')).toEqual([4]);
    const now = new Date();
    const months = [0, 1].map((ahead) => {
      const month = new Date(Date.UTC(now.getUTCFullYear(), now.getUTCMonth() + ahead, 1)).toISOString();
      return `spot_${month.slice(0, 4)}_${month.slice(5, 7)}`;
    });
    expect(
      await read(`SELECT inhrelid::regclass::text AS value FROM pg_inherits
        WHERE inhparent = 'spot'::regclass ORDER BY 1`),
    ).toEqual(expect.arrayContaining(months));
  });
});
