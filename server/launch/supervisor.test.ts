import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { afterEach, beforeEach, expect, test, vi } from 'vitest';
import { createSupervisor } from './supervisor.mjs';

// Real processes: on a busy machine they take longer to begin than a unit test may.
vi.setConfig({ testTimeout: 60_000 });

let root: string;
let said: string[];
let supervisor: ReturnType<typeof createSupervisor>;

const isAlive = (pid: number) =>
  existsSync(`/proc/${pid}`) && !/^State:\s+Z/m.test(readFileSync(`/proc/${pid}/status`, 'utf8'));
const log = (name: string) =>
  existsSync(join(root, `${name}.log`)) ? readFileSync(join(root, `${name}.log`), 'utf8') : '';
const waitFor = (check: () => void) => vi.waitFor(check, { timeout: 30_000, interval: 20 });

beforeEach(() => {
  root = mkdtempSync(join(tmpdir(), 'launch-supervisor-'));
  said = [];
  supervisor = createSupervisor({ root, logFolder: root, say: (text) => said.push(text), drainMs: 500 });
});

afterEach(async () => {
  await supervisor.stop();
  rmSync(root, { recursive: true, force: true });
});

const start = (name: string, script: string) => supervisor.start({ name, args: ['-e', script], env: {} });

test('a process that dies is started again, and the terminal says why', async () => {
  await start('worker', `console.log('began'); setInterval(() => {}, 1000)`);
  await waitFor(() => expect(log('worker')).toBe('began\n'));
  const first = supervisor.pids().worker;
  if (first === undefined) throw new Error('the worker is not running');
  process.kill(first, 'SIGKILL');
  await waitFor(() => expect(log('worker')).toBe('began\nbegan\n'));
  expect(supervisor.pids().worker).not.toBe(first);
  expect(said).toEqual([
    expect.stringMatching(/^The worker has stopped \(signal SIGKILL\); starting it again in 0\.5 s\./),
  ]);
});

test('a process asked to stop may finish its work and is not started again', async () => {
  await start(
    'server',
    `process.on('SIGTERM', () => { console.log('drained'); process.exit(0) }); console.log('began'); setInterval(() => {}, 1000)`,
  );
  await waitFor(() => expect(log('server')).toBe('began\n'));
  await supervisor.stop();
  expect(log('server')).toBe('began\ndrained\n');
  expect(said).toEqual([]);
  expect(supervisor.pids()).toEqual({});
});

test('a process that will not stop is ended by force, with what it had started', async () => {
  await start(
    'stubborn',
    `process.on('SIGTERM', () => {});
     const child = require('child_process').spawn(process.execPath, ['-e', 'process.on("SIGTERM", () => {}); setInterval(() => {}, 1000)']);
     child.on('spawn', () => console.log(process.pid + ' ' + child.pid)); setInterval(() => {}, 1000)`,
  );
  await waitFor(() => expect(log('stubborn')).toMatch(/^\d+ \d+\n$/));
  const pids = log('stubborn').trim().split(' ').map(Number);
  await supervisor.stop();
  await waitFor(() => expect(pids.filter(isAlive)).toEqual([]));
  expect(said).toEqual(['The stubborn did not finish within 0.5 s and was ended by force.']);
});

test('a process that never gets ready fails the start with its last words', async () => {
  const never = supervisor.start({
    name: 'server',
    args: ['-e', `console.error('no such table'); process.exit(1)`],
    env: {},
    readyUrl: 'http://127.0.0.1:1/never',
  });
  await expect(never).rejects.toThrow(/The server does not start\. Its last words:\n(no such table\n?)+/);
});

test('processes do not outlive a launcher that is killed with -9', async () => {
  const script = `
    import { createSupervisor } from ${JSON.stringify(resolve('server/launch/supervisor.mjs'))};
    const supervisor = createSupervisor({ root: ${JSON.stringify(root)}, logFolder: ${JSON.stringify(root)}, say: () => {} });
    await supervisor.start({ name: 'orphan', args: ['-e', 'setInterval(() => {}, 1000)'], env: {} });
    process.stdout.write(String(supervisor.pids().orphan));`;
  const launcher = spawn(process.execPath, ['--input-type=module', '-e', script], {
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  const [chunk] = (await once(launcher.stdout, 'data')) as [Buffer];
  const orphan = Number(chunk.toString());
  expect(isAlive(orphan)).toBe(true);
  launcher.kill('SIGKILL');
  await waitFor(() => expect(isAlive(orphan)).toBe(false));
});
