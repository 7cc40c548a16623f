import { spawnSync } from 'node:child_process';
import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import pg from 'pg';
import type { TestProject } from 'vitest/node';
import { buildClient, buildServer } from '../../server/launch/build.mjs';
import { createTerminal } from '../../server/launch/terminal.mjs';
import { databaseUrl, dropDatabase, nameDatabase } from './database-names.ts';

declare module 'vitest' {
  export interface ProvidedContext {
    /** A database with the demo station and a few nights of it, cloned by every browser test file. */
    demoDatabase: string;
  }
}

const root = fileURLToPath(new URL('../..', import.meta.url));
/** Enough for verdicts and for every picture; the real first start loads thirty. */
const nights = 6;

/**
 * Once per run of the browser tests, after cluster-setup: the delivered programs, built, and the demo station
 * loaded by the very script that `npm start` runs.
 */
export default async function setUp(project: TestProject): Promise<() => Promise<void>> {
  await ensureBuilt();
  const { adminDatabaseUrl, templateDatabase } = project.getProvidedContext();
  const admin = new pg.Client(adminDatabaseUrl);
  await admin.connect();
  const name = nameDatabase('template');
  const tearDown = async (): Promise<void> => {
    await dropDatabase(admin, name);
    await admin.end();
  };
  await admin.query(`CREATE DATABASE ${name} TEMPLATE ${templateDatabase} STRATEGY file_copy`);
  const loader = spawnSync(process.execPath, ['dist/load-demo.js'], {
    cwd: root,
    env: { ...process.env, DATABASE_URL: databaseUrl(adminDatabaseUrl, name), DEMO_NIGHTS: String(nights) },
    encoding: 'utf8',
  });
  if (loader.status !== 0) {
    await tearDown();
    throw new Error(`The demo could not be loaded: ${loader.stderr}`);
  }
  project.provide('demoDatabase', name);
  return tearDown;
}

/** `npm test` has built already; a run by hand builds what is stale. */
async function ensureBuilt(): Promise<void> {
  if (process.env.CHROMIUM_PATH && existsSync(`${root}dist/client/index.html`)) return;
  const terminal = createTerminal();
  const { signal } = new AbortController();
  await buildServer(root, { terminal, signal });
  await buildClient(root, { terminal, signal });
}
