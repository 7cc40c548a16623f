import pg from 'pg';
import type { TestProject } from 'vitest/node';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { loadDemo } from '../../worker/fake-feed/load-demo.ts';
import { databaseUrl, dropDatabase, nameDatabase } from './database-names.ts';

declare module 'vitest' {
  export interface ProvidedContext {
    /** A database with the demo station and a few nights of it, cloned by every browser test file. */
    demoDatabase: string;
  }
}

/** Enough for verdicts and for every picture; the real first start loads thirty. */
const nights = 6;

/** Once per run of the browser tests, after cluster-setup: the demo station, loaded as `npm start` does. */
export default async function setUp(project: TestProject): Promise<() => Promise<void>> {
  const { adminDatabaseUrl, templateDatabase } = project.getProvidedContext();
  const admin = new pg.Client(adminDatabaseUrl);
  await admin.connect();
  const name = nameDatabase('template');
  const tearDown = async (): Promise<void> => {
    await dropDatabase(admin, name);
    await admin.end();
  };
  await admin.query(`CREATE DATABASE ${name} TEMPLATE ${templateDatabase} STRATEGY file_copy`);
  try {
    const dataSource = createDataSource({ url: databaseUrl(adminDatabaseUrl, name), poolSize: 4 });
    await connectDataSource(dataSource);
    try {
      await loadDemo(dataSource, { nowMs: Date.now(), nights });
    } finally {
      await dataSource.destroy();
    }
  } catch (error) {
    await tearDown();
    throw error;
  }
  project.provide('demoDatabase', name);
  return tearDown;
}
