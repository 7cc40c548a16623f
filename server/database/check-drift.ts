import { randomUUID } from 'node:crypto';
import pg from 'pg';
import { connectDataSource, createDataSource } from './data-source.ts';
import { findDrift } from './drift.ts';
import { migrate } from './migrate.ts';

/**
 * Part of `npm run check`: does what the migrations build agree with what the entities say? Migrates a
 * throw-away database on the server of TEST_DATABASE_URL (whose role must be allowed to create databases),
 * prints every difference and drops it again. Exit code 0 = none, 1 = some, 2 = not told where to work.
 */
async function checkDrift(): Promise<number> {
  const adminUrl = process.env.TEST_DATABASE_URL;
  if (!adminUrl || !URL.canParse(adminUrl)) {
    process.stderr.write(
      'TEST_DATABASE_URL is missing or not an address: name a PostgreSQL server for throw-away databases.\n',
    );
    return 2;
  }
  const name = `drift_${randomUUID().replaceAll('-', '')}`;
  const admin = new pg.Client(adminUrl);
  await admin.connect();
  try {
    await admin.query(`CREATE DATABASE ${name}`);
    const url = new URL(adminUrl);
    url.pathname = `/${name}`;
    const drift = await migrateAndCompare(url.href);
    for (const line of drift) process.stdout.write(`${line}\n`);
    process.stdout.write(
      drift.length === 0
        ? 'The migrations build what the entities say.\n'
        : `The migrations and the entities differ in ${drift.length} places.\n`,
    );
    return drift.length === 0 ? 0 : 1;
  } finally {
    await admin.query(`DROP DATABASE IF EXISTS ${name} WITH (FORCE)`);
    await admin.end();
  }
}

async function migrateAndCompare(url: string): Promise<string[]> {
  const dataSource = createDataSource({ url, applicationName: 'whichwire drift check' });
  await connectDataSource(dataSource);
  try {
    await migrate(dataSource);
    return await findDrift(dataSource);
  } finally {
    await dataSource.destroy();
  }
}

process.exitCode = await checkDrift();
