import pg from 'pg';
import { afterAll, beforeAll, expect, test } from 'vitest';
import type { TestDatabase } from '../helpers/database.ts';
import { createTestDatabase } from '../helpers/database.ts';

let first: TestDatabase;
let second: TestDatabase;

beforeAll(async () => {
  [first, second] = await Promise.all([createTestDatabase(), createTestDatabase()]);
});

afterAll(async () => {
  await Promise.all([first.drop(), second.drop()]);
});

async function ask<Row extends pg.QueryResultRow>(url: string, sql: string): Promise<Row[]> {
  const client = new pg.Client(url);
  await client.connect();
  try {
    return (await client.query<Row>(sql)).rows;
  } finally {
    await client.end();
  }
}

test('a test database comes with the whole schema', async () => {
  const tables = await ask<{ name: string }>(
    first.url,
    `SELECT table_name AS name FROM information_schema.tables WHERE table_schema = 'public'`,
  );
  expect(tables.map((table) => table.name)).toEqual(expect.arrayContaining(['station', 'dwell', 'spot']));
});

test('what one test file writes, another does not see', async () => {
  await ask(first.url, 'CREATE TABLE only_here (id int)');
  const seen = await ask<{ place: string | null }>(
    second.url,
    `SELECT to_regclass('only_here')::text AS place`,
  );
  expect(seen).toEqual([{ place: null }]);
});

test('dropping a test database cuts off a connection that was left open', async () => {
  const database = await createTestDatabase();
  const forgotten = new pg.Client(database.url);
  await forgotten.connect();
  const cutOff = new Promise<string>((resolve) => forgotten.on('error', (error) => resolve(error.message)));
  await database.drop();
  expect(await cutOff).toMatch(/terminat/);
});
