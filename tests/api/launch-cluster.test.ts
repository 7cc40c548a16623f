import { spawn } from 'node:child_process';
import { once } from 'node:events';
import {
  chmodSync,
  chownSync,
  existsSync,
  mkdirSync,
  readFileSync,
  readdirSync,
  statSync,
  writeFileSync,
} from 'node:fs';
import { join } from 'node:path';
import pg from 'pg';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, test, vi } from 'vitest';
import type { Cluster } from '../../server/launch/cluster.mjs';
import { chooseHome, openStationCluster, openThrowAwayCluster } from '../../server/launch/cluster.mjs';
import { databaseAccount, findAccount } from '../../server/launch/debian.mjs';
import { processesIn } from '../../server/launch/postmaster.mjs';
import type { PreparedCluster, Workshop } from '../helpers/launch-workshop.ts';
import { isAlive, openWorkshop, prepareCluster } from '../helpers/launch-workshop.ts';

/**
 * The private database of `npm start`, on a real PostgreSQL: what a kill at the worst moment leaves behind,
 * and that the next start gets over it.
 */

const isRoot = process.getuid?.() === 0;
const account = databaseAccount();

let workshop: Workshop;
let home: string;
let said: string[];
let opened: Cluster[];

/** Making a cluster is the point of few tests only; the others begin with a copy. */
let prepared: PreparedCluster;

const open = async () => {
  const cluster = await openStationCluster({ home, say: (text) => said.push(text) });
  opened.push(cluster);
  return cluster;
};

/** Opens the cluster in a launcher of its own, which can be killed; prints its address, then stays. */
const openElsewhere = `
  import { openStationCluster } from './launch/cluster.mjs';
  const cluster = await openStationCluster({ home: process.cwd() + '/postgres', say: console.log });
  await cluster.ensureDatabase('kept');
  console.log('pid ' + cluster.pid);
  console.log('url ' + cluster.url('kept'));
  process.on('SIGTERM', () => cluster.stop().then(() => process.exit(0)));
  setInterval(() => {}, 1000);`;

beforeAll(async () => {
  prepared = await prepareCluster();
});

afterAll(() => prepared.remove());

beforeEach(() => {
  workshop = openWorkshop();
  home = join(workshop.folder, 'postgres');
  said = [];
  opened = [];
});

afterEach(async () => {
  for (const cluster of opened) await cluster.stop();
  await workshop.close();
});

async function ask<Row extends pg.QueryResultRow>(url: string, sql: string): Promise<Row[]> {
  const client = new pg.Client(url);
  // A server that is killed breaks the connection; the query itself reports it.
  client.on('error', () => undefined);
  await client.connect();
  try {
    return (await client.query<Row>(sql)).rows;
  } finally {
    await client.end();
  }
}

describe('the database of a station', () => {
  test('it is durable, on loopback only, asks for a password, and the program is no superuser in it', async () => {
    const cluster = await open();
    await cluster.ensureDatabase('station');
    const url = cluster.url('station');
    const [settings] = await ask(
      cluster.url('station', 'postgres'),
      `SELECT current_setting('fsync') AS fsync, current_setting('synchronous_commit') AS commit,
              current_setting('full_page_writes') AS pages, current_setting('listen_addresses') AS listen,
              current_setting('unix_socket_directories') AS socket, current_setting('server_encoding') AS encoding,
              (SELECT rolsuper FROM pg_roles WHERE rolname = 'whichwire') AS super`,
    );
    expect(settings).toEqual({
      ...{
        fsync: 'on',
        commit: 'on',
        pages: 'on',
        listen: '127.0.0.1',
        socket: '',
        encoding: 'UTF8',
        super: false,
      },
    });
    const stranger = new URL(url);
    stranger.password = 'guessed';
    await expect(ask(stranger.href, 'SELECT 1')).rejects.toThrow('password authentication failed');
    expect(statSync(home).mode & 0o077).toBe(0);
  });

  test('the program’s role may install the extension that the overlap constraint needs', async () => {
    prepared.copyTo(home);
    const cluster = await open();
    await cluster.ensureDatabase('station');
    await ask(cluster.url('station'), 'CREATE EXTENSION btree_gist');
    const found = await ask(
      cluster.url('station'),
      `SELECT extname FROM pg_extension WHERE extname = 'btree_gist'`,
    );
    expect(found).toEqual([{ extname: 'btree_gist' }]);
  });

  test('stopping leaves no process behind, and what was written is there at the next start', async () => {
    prepared.copyTo(home);
    const first = await open();
    await first.ensureDatabase('station');
    await ask(first.url('station'), 'CREATE TABLE kept AS SELECT 42 AS answer');
    const { pid } = first;
    await first.stop();
    expect(isAlive(pid)).toBe(false);
    expect(processesIn(join(home, 'data'))).toEqual([]);
    const second = await open();
    expect(await ask(second.url('station'), 'SELECT answer FROM kept')).toEqual([{ answer: 42 }]);
  });

  test('a killed server process is replaced on the same port, and committed rows survive', async () => {
    prepared.copyTo(home);
    const cluster = await open();
    await cluster.ensureDatabase('station');
    await ask(cluster.url('station'), 'CREATE TABLE kept AS SELECT 42 AS answer');
    const { pid, port } = cluster;
    process.kill(pid, 'SIGKILL');
    await vi.waitFor(() => expect(said).toContain('The database is up again.'), { timeout: 40_000 });
    expect(cluster.pid).not.toBe(pid);
    expect(cluster.port).toBe(port);
    expect(await ask(cluster.url('station'), 'SELECT answer FROM kept')).toEqual([{ answer: 42 }]);
  });
});

describe('after a kill at the worst moment', () => {
  test('a launcher killed while the cluster is being made leaves nothing that stops the next start', async () => {
    const launcher = workshop.run(openElsewhere);
    const halfMade = () => readdirSync(workshop.folder).filter((name) => name.startsWith('postgres.making-'));
    const begun = () =>
      halfMade().some((name) => existsSync(join(workshop.folder, name, 'data', 'PG_VERSION')));
    await vi.waitFor(() => expect(begun()).toBe(true), { timeout: 20_000, interval: 5 });
    await launcher.end('SIGKILL');
    expect(existsSync(home)).toBe(false);
    const cluster = await open();
    expect((await cluster.query('SELECT 1')).trim()).toBe('1');
    expect(halfMade()).toEqual([]);
  });

  test('launcher and server killed with -9 leave a busy orphan on the old memory, which the next start gets over', async () => {
    prepared.copyTo(home);
    const launcher = workshop.run(openElsewhere);
    const pid = Number((await launcher.waitForLine(/^pid /)).slice(4));
    const url = (await launcher.waitForLine(/^url /)).slice(4);
    await ask(url, 'CREATE TABLE kept AS SELECT 42 AS answer');
    // A loop notices neither the end of its client nor that of the server process.
    const orphan = ask(url, 'DO $$ BEGIN LOOP END LOOP; END $$').catch((error: Error) => error.message);
    const [busy] = await vi.waitFor(async () => {
      const found = await ask<{ pid: number }>(
        url,
        `SELECT pid FROM pg_stat_activity WHERE query LIKE 'DO %LOOP%' AND state = 'active'`,
      );
      expect(found).toHaveLength(1);
      return found;
    });
    process.kill(pid, 'SIGKILL');
    await launcher.end('SIGKILL');
    expect(existsSync(join(home, 'data', 'postmaster.pid'))).toBe(true);
    expect(isAlive(busy!.pid)).toBe(true);
    const cluster = await open();
    expect(isAlive(busy!.pid)).toBe(false);
    expect(await orphan).toMatch(/terminat/);
    expect(await ask(cluster.url('kept'), 'SELECT answer FROM kept')).toEqual([{ answer: 42 }]);
  });

  test('a postmaster.pid whose number belongs to a stranger now stops nobody, and the stranger is left alone', async () => {
    prepared.copyTo(home);
    await (await open()).stop();
    const stranger = spawn('sleep', ['600'], {
      cwd: '/',
      ...(account && { uid: account.uid, gid: account.gid }),
    });
    await once(stranger, 'spawn');
    const pidFile = join(home, 'data', 'postmaster.pid');
    writeFileSync(
      pidFile,
      `${stranger.pid}\n${join(home, 'data')}\n1764547200\n5432\n\n127.0.0.1\n  1234567  1\nready   \n`,
      { mode: 0o600 },
    );
    if (account) chownSync(pidFile, account.uid, account.gid);
    try {
      const cluster = await open();
      expect((await cluster.query('SELECT 1')).trim()).toBe('1');
      expect(isAlive(stranger.pid!)).toBe(true);
    } finally {
      stranger.kill();
    }
  });

  test('a launcher killed with -9 takes its server process with it', async () => {
    prepared.copyTo(home);
    const launcher = workshop.run(openElsewhere);
    const pid = Number((await launcher.waitForLine(/^pid /)).slice(4));
    await launcher.end('SIGKILL');
    await vi.waitFor(() => expect(isAlive(pid)).toBe(false), { timeout: 20_000 });
  });
});

describe('where the database lives and who runs it', () => {
  test('a checkout that the database’s user cannot reach gets a folder outside', async () => {
    const closed = join(workshop.folder, 'closed');
    const dataFolder = join(closed, '.data');
    const outsideFolder = join(workshop.folder, 'outside');
    mkdirSync(dataFolder, { recursive: true });
    chmodSync(closed, 0o700);
    // Whoever is not root runs the database themselves and reaches what they own.
    const place = isRoot ? join(outsideFolder, 'postgres') : join(dataFolder, 'postgres');
    home = await chooseHome({ dataFolder, outsideFolder, account });
    expect(home).toBe(place);
    prepared.copyTo(home);
    const cluster = await open();
    expect((await cluster.query('SHOW data_directory')).trim()).toBe(join(place, 'data'));
  });

  test('a checkout that it can reach keeps its own database', async () => {
    const dataFolder = join(workshop.folder, '.data');
    mkdirSync(dataFolder);
    const chosen = await chooseHome({ dataFolder, outsideFolder: join(workshop.folder, 'outside'), account });
    expect(chosen).toBe(join(dataFolder, 'postgres'));
  });

  test('a user who is not root makes and runs it without help', async () => {
    const user = isRoot ? findAccount('nobody') : null;
    const own = join(workshop.folder, 'own');
    mkdirSync(own);
    if (user) chownSync(own, user.uid, user.gid);
    const launcher = workshop.run(openElsewhere.replace('/postgres', '/own/postgres'), user);
    const pid = Number((await launcher.waitForLine(/^pid /)).slice(4));
    const url = (await launcher.waitForLine(/^url /)).slice(4);
    expect(await ask(url, 'SELECT 1 AS one')).toEqual([{ one: 1 }]);
    expect(statSync(`/proc/${pid}`).uid).toBe(user?.uid ?? process.getuid?.());
    expect(await launcher.end('SIGTERM')).toBe(0);
    expect(isAlive(pid)).toBe(false);
  });

  test('a folder with something else in it is refused and not touched', async () => {
    mkdirSync(home);
    writeFileSync(join(home, 'letter.txt'), 'keep me');
    await expect(open()).rejects.toThrow(`${home} exists but holds no database.`);
    expect(readFileSync(join(home, 'letter.txt'), 'utf8')).toBe('keep me');
  });
});

describe('the database of a test run', () => {
  test('it is fast, forgetful and gone without a trace afterwards', async () => {
    const parent = join(workshop.folder, 'temporary');
    mkdirSync(parent);
    const cluster = await openThrowAwayCluster({ parent });
    const [settings] = await ask(
      cluster.url('postgres', 'postgres'),
      `SELECT current_setting('fsync') AS fsync, (SELECT rolcreatedb FROM pg_roles WHERE rolname = current_user) AS may_create`,
    );
    expect(settings).toEqual({ fsync: 'off', may_create: true });
    await cluster.stop();
    expect(isAlive(cluster.pid)).toBe(false);
    expect(readdirSync(parent)).toEqual([]);
  });
});
