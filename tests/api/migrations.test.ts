import { spawn } from 'node:child_process';
import { readdirSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { DataSource, type MigrationInterface, type QueryRunner } from 'typeorm';
import { afterEach, beforeEach, expect, test } from 'vitest';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { migrate } from '../../server/database/migrate.ts';
import { migrations } from '../../server/database/migrations/index.ts';
import type { TestDatabase } from '../helpers/database.ts';
import { createTestDatabase } from '../helpers/database.ts';

let database: TestDatabase;
const opened: DataSource[] = [];

async function open(): Promise<DataSource> {
  const dataSource = await connectDataSource(createDataSource({ url: database.url, poolSize: 1 }));
  opened.push(dataSource);
  return dataSource;
}

beforeEach(async () => {
  database = await createTestDatabase();
  await (await open()).query('DROP SCHEMA public CASCADE; CREATE SCHEMA public');
});

afterEach(async () => {
  await Promise.all(opened.splice(0).map((dataSource) => dataSource.destroy()));
  await database.drop();
});

const names = migrations.map((migration) => migration.name);

test('every migration of the folder is in the list, oldest first', () => {
  const folder = new URL('../../server/database/migrations/', import.meta.url);
  const stamps = readdirSync(folder)
    .filter((file) => file !== 'index.ts')
    .map((file) => file.split('-')[0]!)
    .sort();
  expect(names.map((name) => name.slice(-13))).toEqual(stamps);
});

test('of five processes that migrate at once, one does it and the others find it done', async () => {
  const dataSources = await Promise.all(Array.from({ length: 5 }, open));
  const done = await Promise.all(dataSources.map((dataSource) => migrate(dataSource)));
  expect(done.flat()).toEqual(names);
  expect(done.filter((ran) => ran.length === 0)).toHaveLength(4);
  expect(await dataSources[0]!.query('SELECT name FROM migrations ORDER BY id')).toEqual(
    names.map((name) => ({ name })),
  );
});

test('a run waits for one that is under way, even past its own statement timeout', async () => {
  const holder = await open();
  const waiter = createDataSource({ url: database.url, poolSize: 1, statementTimeoutSeconds: 0.05 });
  opened.push(await connectDataSource(waiter));
  const watcher = await open();
  await holder.query('SELECT pg_advisory_lock(1764547200)');
  const done = migrate(waiter);
  const waits = `SELECT extract(epoch FROM clock_timestamp() - query_start) AS seconds FROM pg_stat_activity
    WHERE datname = current_database() AND wait_event = 'advisory'`;
  for (;;) {
    const [row] = await watcher.query(waits);
    if (row && row.seconds > 0.2) break;
  }
  await holder.query('SELECT pg_advisory_unlock(1764547200)');
  expect(await done).toEqual(names);
  expect(await waiter.query('SHOW statement_timeout')).toEqual([{ statement_timeout: '50ms' }]);
});

class Broken1999999999999 implements MigrationInterface {
  async up(queryRunner: QueryRunner): Promise<void> {
    await queryRunner.query('CREATE TABLE half_done (id integer)');
    await queryRunner.query('SELECT this_is_not_a_function()');
  }

  async down(): Promise<void> {
    throw new Error('Never reached.');
  }
}

test('a migration that fails leaves the schema as it was and lets the next run in', async () => {
  const healthy = await open();
  await migrate(healthy);
  const broken = new DataSource({ ...healthy.options, migrations: [...migrations, Broken1999999999999] });
  opened.push(await broken.initialize());
  await expect(migrate(broken)).rejects.toThrow(/this_is_not_a_function/);
  expect(await healthy.query(`SELECT to_regclass('half_done') AS place`)).toEqual([{ place: null }]);
  expect(await migrate(healthy)).toEqual([]);
});

async function runScript(databaseUrl: string): Promise<{ code: number | null; output: string }> {
  const script = fileURLToPath(new URL('../../server/database/migrate.ts', import.meta.url));
  const env = { ...process.env, DATABASE_URL: databaseUrl, DATABASE_WAIT_SECONDS: '0.2' };
  const child = spawn(process.execPath, ['--import', 'tsx', script], { env });
  let output = '';
  child.stdout.on('data', (chunk: Buffer) => (output += chunk.toString()));
  child.stderr.on('data', (chunk: Buffer) => (output += chunk.toString()));
  const code = await new Promise<number | null>((resolve) => child.on('close', resolve));
  return { code, output };
}

test('the script migrates, says what it ran, and has nothing to do the second time', async () => {
  expect(await runScript(database.url)).toEqual({ code: 0, output: `Migrated: ${names.join(', ')}.\n` });
  expect(await runScript(database.url)).toEqual({ code: 0, output: 'The schema is up to date.\n' });
});

test('the script says which database it cannot reach, without the password', async () => {
  const url = new URL(database.url);
  url.pathname = '/nowhere';
  const { code, output } = await runScript(url.href);
  expect(code).toBe(1);
  expect(output).toBe(
    `No connection to the database at ${url.host}/nowhere: database "nowhere" does not exist\n`,
  );
});

test('the script says what kind of address it wants', async () => {
  const { code, output } = await runScript('');
  expect(code).toBe(2);
  expect(output).toMatch(/^DATABASE_URL is missing .*postgres:\/\/user:password@host:5432\/database\n$/);
});
