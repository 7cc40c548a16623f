import { randomBytes } from 'node:crypto';
import type pg from 'pg';

/** Longer than any run takes: what is older was left behind by a run that was killed. */
const ABANDONED_AFTER_SECONDS = 3 * 3600;

/** A name no other run uses, carrying the second it was made: `whichwire_test_1764547200_1f0c9a7be2d4`. */
export function nameDatabase(purpose: 'template' | 'test'): string {
  return `whichwire_${purpose}_${Math.floor(Date.now() / 1000)}_${randomBytes(6).toString('hex')}`;
}

/** The same server and role, another database. */
export function databaseUrl(adminUrl: string, database: string): string {
  const url = new URL(adminUrl);
  url.pathname = `/${database}`;
  return url.href;
}

/** Drops a database together with the connections that are still open to it. */
export async function dropDatabase(admin: pg.Client, database: string): Promise<void> {
  await admin.query(`DROP DATABASE IF EXISTS ${database} WITH (FORCE)`);
}

/** Clears away the databases of killed runs, which would fill a shared cluster's disk. */
export async function removeAbandonedDatabases(admin: pg.Client): Promise<void> {
  const found = await admin.query<{ datname: string; datistemplate: boolean }>(
    `SELECT datname, datistemplate FROM pg_database
     WHERE datname ~ '^whichwire_(template|test)_[0-9]+_[0-9a-f]{12}$'
       AND split_part(datname, '_', 3)::bigint < extract(epoch FROM now()) - $1`,
    [ABANDONED_AFTER_SECONDS],
  );
  for (const { datname, datistemplate } of found.rows) {
    if (datistemplate) await admin.query(`ALTER DATABASE ${datname} IS_TEMPLATE false`);
    await dropDatabase(admin, datname);
  }
}
