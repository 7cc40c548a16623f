import { once } from 'node:events';
import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { createServer } from 'node:net';
import type { AddressInfo } from 'node:net';
import { join } from 'node:path';
import { afterAll, afterEach, beforeAll, beforeEach, expect, test, vi } from 'vitest';
import type { LaunchedScript, PreparedCluster, Workshop } from '../helpers/launch-workshop.ts';
import { isAlive, openWorkshop, prepareCluster, processesMentioning } from '../helpers/launch-workshop.ts';

/**
 * The start as a whole, with small stand-ins for server and worker: what is tested is how they are started,
 * watched and ended, on a real PostgreSQL and with real signals.
 */

let prepared: PreparedCluster;
let workshop: Workshop;

const server = `
  import { createServer } from 'node:http';
  process.on('SIGTERM', () => { console.log('drained'); process.exit(0); });
  createServer((request, response) => response.writeHead(request.url === '/api/health/ready' ? 200 : 404).end(process.env.DEMO))
    .listen(Number(process.env.PORT), process.env.HOST);`;

const worker = `
  console.log('feed at ' + process.env.FEED_HOST + ', database ' + new URL(process.env.DATABASE_URL).pathname);
  process.on('SIGTERM', () => process.exit(0));
  setInterval(() => {}, 1000);`;

/** Fails on its first run, after half of its work; goes on from there on the second. */
const loadDemo = `
  import { existsSync, writeFileSync } from 'node:fs';
  if (existsSync('half-loaded')) { console.log('nights 16 to 30'); process.exit(0); }
  writeFileSync('half-loaded', '');
  console.log('nights 1 to 15');
  process.exit(1);`;

const launcher = (wantedPort: number, scripts: string[] = []) => `
  import { launch } from './launch/launch.mjs';
  import { createTerminal, printFailure } from './launch/terminal.mjs';
  const stopping = new AbortController();
  for (const name of ['SIGINT', 'SIGTERM']) process.on(name, () => stopping.abort());
  try {
    const running = await launch({
      root: process.cwd(), demo: true, database: 'whichwire_demo', host: '127.0.0.1', wantedPort: ${wantedPort},
      env: { DEMO: '1' }, besides: [], outsideFolder: process.cwd() + '/outside',
      scripts: ${JSON.stringify(scripts)}.map((name) => ({ label: 'Running ' + name, args: [name] })),
      processes: [{ name: 'worker', args: ['worker.mjs'] }, { name: 'server', args: ['server.mjs'], readyPath: '/api/health/ready' }],
    }, { terminal: createTerminal(), signal: stopping.signal });
    console.log('ready ' + running.url);
    console.log('pids ' + JSON.stringify({ ...running.pids(), database: running.cluster.pid }));
    if (!stopping.signal.aborted) await new Promise((done) => stopping.signal.addEventListener('abort', done));
    await running.stop();
  } catch (error) {
    printFailure(error);
    process.exitCode = 1;
  }`;

async function readPids(script: LaunchedScript) {
  const line = await script.waitForLine(/^pids /);
  return JSON.parse(line.slice(5)) as { worker: number; server: number; database: number };
}

const readyAt = async (script: LaunchedScript) => (await script.waitForLine(/^ready /)).slice(6);

beforeAll(async () => {
  prepared = await prepareCluster();
});

afterAll(() => prepared.remove());

beforeEach(() => {
  workshop = openWorkshop();
  mkdirSync(join(workshop.folder, '.data'));
  prepared.copyTo(join(workshop.folder, '.data', 'postgres'));
  writeFileSync(join(workshop.folder, 'server.mjs'), server);
  writeFileSync(join(workshop.folder, 'worker.mjs'), worker);
  writeFileSync(join(workshop.folder, 'load-demo.mjs'), loadDemo);
});

afterEach(() => workshop.close());

test.each(['SIGINT', 'SIGTERM'] as const)(
  '%s ends server, worker and database in good order and leaves no process behind',
  async (signal) => {
    const script = workshop.run(launcher(4180));
    const pids = Object.values(await readPids(script));
    expect(pids.map(isAlive)).toEqual([true, true, true]);
    expect(await script.end(signal)).toBe(0);
    expect(pids.map(isAlive)).toEqual([false, false, false]);
    expect(processesMentioning(workshop.folder)).toEqual([]);
    expect(readFileSync(join(workshop.folder, '.data', 'logs', 'server.log'), 'utf8')).toContain('drained');
  },
);

test('a launcher killed with -9 leaves no process behind either, and the next start is up again', async () => {
  const first = workshop.run(launcher(4180));
  const pids = Object.values(await readPids(first));
  await first.end('SIGKILL');
  await vi.waitFor(() => expect(pids.filter(isAlive)).toEqual([]), { timeout: 20_000 });
  const second = workshop.run(launcher(4180));
  const response = await fetch(`${await readyAt(second)}/api/health/ready`);
  expect(await response.text()).toBe('1');
  expect(await second.end('SIGINT')).toBe(0);
});

test('a taken port is said and replaced by the next free one', async () => {
  const other = createServer();
  other.listen(0, '127.0.0.1');
  await once(other, 'listening');
  const taken = (other.address() as AddressInfo).port;
  const script = workshop.run(launcher(taken));
  const url = await readyAt(script);
  const used = Number(new URL(url).port);
  expect(used).toBeGreaterThan(taken);
  expect(script.lines).toContain(`  Port ${taken} is taken on this machine; using ${used} instead.`);
  expect((await fetch(`${url}/api/health/ready`)).status).toBe(200);
  await script.end('SIGINT');
  other.close();
});

test('a first start that broke off while loading the demo is finished by the next', async () => {
  const first = workshop.run(launcher(4180, ['load-demo.mjs']));
  await first.waitForLine(/Running load-demo.mjs: ended with code 1/);
  await vi.waitFor(() => expect(first.child.exitCode).toBe(1), { timeout: 20_000 });
  expect(processesMentioning(workshop.folder)).toEqual([]);
  const second = workshop.run(launcher(4180, ['load-demo.mjs']));
  await readyAt(second);
  expect(second.lines).toContain('      nights 16 to 30');
  await second.end('SIGINT');
});

test('Ctrl-C in the middle of the start ends it at once and leaves no process behind', async () => {
  writeFileSync(
    join(workshop.folder, 'slow.mjs'),
    `console.log('slow work begins'); setInterval(() => {}, 1000);`,
  );
  const script = workshop.run(launcher(4180, ['slow.mjs']));
  await script.waitForLine(/slow work begins/);
  await script.end('SIGINT');
  expect(script.lines.some((line) => line.startsWith('ready'))).toBe(false);
  expect(processesMentioning(workshop.folder)).toEqual([]);
});

test('a killed server and a killed database both come back under the same address', async () => {
  const script = workshop.run(launcher(4180));
  const url = await readyAt(script);
  const pids = await readPids(script);
  process.kill(pids.database, 'SIGKILL');
  process.kill(pids.server, 'SIGKILL');
  await script.waitForLine(/^The database is up again\.$/);
  await script.waitForLine(/^The server has stopped \(signal SIGKILL\); starting it again/);
  await vi.waitFor(async () => expect((await fetch(`${url}/api/health/ready`)).status).toBe(200), {
    timeout: 20_000,
  });
  expect(isAlive(pids.worker)).toBe(true);
  expect(await script.end('SIGINT')).toBe(0);
  expect(processesMentioning(workshop.folder)).toEqual([]);
});

test('processes learn where database and feed are, and their words go to their log', async () => {
  const script = workshop.run(launcher(4180));
  await readyAt(script);
  const log = join(workshop.folder, '.data', 'logs', 'worker.log');
  await vi.waitFor(() =>
    expect(existsSync(log) && readFileSync(log, 'utf8')).toBe(
      'feed at 127.0.0.1, database /whichwire_demo\n',
    ),
  );
  await script.end('SIGINT');
});
