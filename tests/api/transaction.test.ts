import type { DataSource, EntityManager } from 'typeorm';
import { afterAll, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { inTransaction, isUniqueViolation } from '../../server/database/transaction.ts';
import type { TestDatabase } from '../helpers/database.ts';
import { createTestDatabase } from '../helpers/database.ts';

let database: TestDatabase;
let dataSource: DataSource;

beforeAll(async () => {
  database = await createTestDatabase();
  dataSource = await connectDataSource(createDataSource({ url: database.url }));
  await dataSource.query('CREATE TABLE tally (id integer PRIMARY KEY, n integer NOT NULL)');
});

afterAll(async () => {
  await dataSource.destroy();
  await database.drop();
});

beforeEach(async () => {
  await dataSource.query('TRUNCATE tally');
  await dataSource.query('INSERT INTO tally VALUES (1, 0), (2, 0)');
});

const tally = (): Promise<{ id: number; n: number }[]> =>
  dataSource.query('SELECT id, n FROM tally ORDER BY id');

/** Lets everybody through once so many have come; those who come later are not held. */
function meetingOf(size: number): () => Promise<void> {
  let open: () => void;
  const opened = new Promise<void>((resolve) => (open = resolve));
  let here = 0;
  return async () => {
    here += 1;
    if (here >= size) open();
    await opened;
  };
}

const addOne = (manager: EntityManager, id: number): Promise<unknown> =>
  manager.query('UPDATE tally SET n = n + 1 WHERE id = $1', [id]);

describe('a transaction', () => {
  test('returns what its work returns', async () => {
    expect(await inTransaction(dataSource, async (manager) => manager.query('SELECT 7 AS n'))).toEqual([
      { n: 7 },
    ]);
  });

  test('stores nothing when its work fails, and does not try an ordinary error again', async () => {
    let runs = 0;
    const error = await inTransaction(dataSource, async (manager) => {
      runs += 1;
      await addOne(manager, 1);
      await manager.query('INSERT INTO tally VALUES (2, 5)');
    }).catch((reason: unknown) => reason);
    expect(isUniqueViolation(error, 'tally_pkey')).toBe(true);
    expect(isUniqueViolation(error, 'another_key')).toBe(false);
    expect(runs).toBe(1);
    expect(await tally()).toEqual([
      { id: 1, n: 0 },
      { id: 2, n: 0 },
    ]);
  });

  test('that reads what another changes is done again, so that neither change is lost', async () => {
    const bothHaveRead = meetingOf(2);
    let runs = 0;
    const work = () =>
      inTransaction(
        dataSource,
        async (manager) => {
          runs += 1;
          const [row] = await manager.query('SELECT n FROM tally WHERE id = 1');
          await bothHaveRead();
          await manager.query('UPDATE tally SET n = $1 WHERE id = 1', [row.n + 1]);
        },
        { isolation: 'SERIALIZABLE' },
      );
    await Promise.all([work(), work()]);
    expect((await tally())[0]).toEqual({ id: 1, n: 2 });
    expect(runs).toBe(3);
  });

  test('that is chosen to end a deadlock is done again', async () => {
    const bothHoldOne = meetingOf(2);
    let runs = 0;
    const work = (first: number, second: number) =>
      inTransaction(dataSource, async (manager) => {
        runs += 1;
        await addOne(manager, first);
        await bothHoldOne();
        await addOne(manager, second);
      });
    await Promise.all([work(1, 2), work(2, 1)]);
    expect(await tally()).toEqual([
      { id: 1, n: 2 },
      { id: 2, n: 2 },
    ]);
    expect(runs).toBe(3);
  });

  test('is given up when it has lost as often as it was allowed to', async () => {
    let runs = 0;
    const work = inTransaction(
      dataSource,
      async (manager) => {
        runs += 1;
        const [row] = await manager.query('SELECT n FROM tally WHERE id = 1');
        await dataSource.query('UPDATE tally SET n = n + 10 WHERE id = 1');
        await manager.query('UPDATE tally SET n = $1 WHERE id = 1', [row.n + 1]);
      },
      { isolation: 'REPEATABLE READ', retries: 2 },
    );
    await expect(work).rejects.toMatchObject({ driverError: { code: '40001' } });
    expect(runs).toBe(3);
    expect((await tally())[0]).toEqual({ id: 1, n: 30 });
  });
});
