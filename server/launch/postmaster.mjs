import {
  closeSync,
  existsSync,
  openSync,
  readFileSync,
  readdirSync,
  readlinkSync,
  realpathSync,
  renameSync,
  rmSync,
  statfsSync,
} from 'node:fs';
import { join } from 'node:path';
import { setTimeout as delay } from 'node:timers/promises';
import { lastLines, spawnChild } from './commands.mjs';
import { freePort } from './ports.mjs';
import { LaunchError } from './terminal.mjs';

/**
 * Starting and stopping one PostgreSQL server process (the "postmaster") over a data folder.
 *
 * After a kill -9 three kinds of leftovers can be in the way: the postmaster itself, its child
 * processes still holding the old shared memory, and a postmaster.pid that names a process which is
 * gone or, worse, a process number that somebody else got since. `pg_ctl status` is wrong about the
 * last, and deleting postmaster.pid blindly would let two servers write the same files. So the
 * question asked here is the one that matters: which processes have this folder as their working
 * directory? Every PostgreSQL process does.
 */

/** @typedef {import('./commands.mjs').Account} Account */
/**
 * @typedef {object} PostmasterOptions
 * @property {string} binaries folder of the postgres program
 * @property {string} dataFolder
 * @property {string} logPath
 * @property {Account | null} account
 * @property {Record<string, string>} settings server settings beyond those every cluster gets
 * @property {number} [port] keep this one (a restart under running clients); otherwise a free one
 * @property {AbortSignal} [signal]
 */
/** @typedef {{ process: import('node:child_process').ChildProcess, pid: number, port: number }} Postmaster */

const pollMs = 50;
const startDeadlineMs = 300_000;
const leftoverDeadlineMs = 30_000;

/**
 * @param {string} folder
 * @returns {number[]} processes whose working directory is this folder
 */
export function processesIn(folder) {
  if (!existsSync(folder) || !existsSync('/proc/self')) return [];
  const real = realpathSync(folder);
  return readdirSync('/proc')
    .filter((name) => /^\d+$/.test(name))
    .map(Number)
    .filter((pid) => {
      try {
        return readlinkSync(`/proc/${pid}/cwd`) === real;
      } catch {
        // Ended meanwhile, or another user's process: a cluster's own ones are always readable.
        return false;
      }
    });
}

/**
 * Ends what a killed launcher or a killed postmaster left behind in the data folder. Politely first:
 * a fast shutdown loses nothing, and a crash is recovered from the log at the next start.
 *
 * @param {string} dataFolder
 */
export async function endLeftovers(dataFolder) {
  const startedAt = performance.now();
  /** @type {Set<string>} who was told what */
  const told = new Set();
  for (;;) {
    const left = processesIn(dataFolder);
    if (left.length === 0) return;
    const elapsedMs = performance.now() - startedAt;
    if (elapsedMs > leftoverDeadlineMs) {
      throw new LaunchError(`Processes ${left.join(', ')} still use ${dataFolder} and cannot be ended.`);
    }
    const main = readPostmasterFile(dataFolder)?.pid;
    const hasMain = main !== undefined && left.includes(main);
    /** @type {NodeJS.Signals} */
    const signal =
      elapsedMs > 20_000 ? 'SIGKILL' : elapsedMs > 10_000 ? 'SIGQUIT' : hasMain ? 'SIGINT' : 'SIGTERM';
    // The postmaster ends its children in good order; without one each is told for itself.
    for (const pid of hasMain && signal !== 'SIGKILL' ? [main] : left) {
      if (told.has(`${pid} ${signal}`)) continue;
      told.add(`${pid} ${signal}`);
      signalProcess(pid, signal);
    }
    await delay(pollMs);
  }
}

/**
 * @param {number} pid
 * @param {NodeJS.Signals} signal
 */
function signalProcess(pid, signal) {
  try {
    process.kill(pid, signal);
  } catch (error) {
    if (/** @type {NodeJS.ErrnoException} */ (error).code !== 'ESRCH') throw error;
  }
}

/**
 * @param {string} dataFolder
 * @returns {{ pid: number, port: number, ready: boolean } | null}
 */
export function readPostmasterFile(dataFolder) {
  let lines;
  try {
    lines = readFileSync(join(dataFolder, 'postmaster.pid'), 'utf8').split('\n');
  } catch {
    return null;
  }
  return { pid: Number(lines[0]), port: Number(lines[3]), ready: (lines[7] ?? '').trim() === 'ready' };
}

/**
 * Starts the server and resolves when it takes connections.
 *
 * @param {PostmasterOptions} options
 * @returns {Promise<Postmaster>}
 */
export async function startPostmaster(options) {
  const { dataFolder, logPath, signal } = options;
  const giveUpAt = performance.now() + startDeadlineMs;
  const giveUpOnLeftoversAt = performance.now() + leftoverDeadlineMs;
  for (;;) {
    signal?.throwIfAborted();
    await endLeftovers(dataFolder);
    const port = options.port ?? (await freePort());
    const child = spawnPostmaster(options, port);
    const outcome = await waitUntilReady(child, dataFolder, giveUpAt, signal);
    if (outcome !== null) return outcome;
    const log = readFileSync(logPath, 'utf8');
    const retryLeftovers = performance.now() < giveUpOnLeftoversAt;
    if (
      /could not bind|Address already in use|could not create any TCP\/IP sockets/.test(log) &&
      retryLeftovers
    ) {
      // Somebody took the port between our probe and the server's bind.
      await delay(options.port === undefined ? 0 : 500);
    } else if (/pre-existing shared memory block/.test(log) && retryLeftovers) {
      await delay(500);
    } else if (
      /lock file "postmaster.pid" already exists/.test(log) &&
      retryLeftovers &&
      processesIn(dataFolder).length === 0
    ) {
      // The number in the file belongs to a stranger now. No process works in this folder, so nobody can be harmed.
      rmSync(join(dataFolder, 'postmaster.pid'), { force: true });
    } else {
      throw new LaunchError(`PostgreSQL does not start. Its last words (${logPath}):\n${lastLines(log, 15)}`);
    }
  }
}

/**
 * @param {PostmasterOptions} options
 * @param {number} port
 */
function spawnPostmaster({ binaries, dataFolder, logPath, account, settings }, port) {
  const all = {
    listen_addresses: '127.0.0.1',
    unix_socket_directories: '',
    port: String(port),
    timezone: 'UTC',
    log_timezone: 'UTC',
    ...sharedMemorySettings(),
    ...settings,
  };
  if (existsSync(logPath)) renameSync(logPath, `${logPath}.1`);
  const log = openSync(logPath, 'a', 0o600);
  try {
    return spawnChild(
      join(binaries, 'postgres'),
      ['-D', dataFolder, ...Object.entries(all).flatMap(([name, value]) => ['-c', `${name}=${value}`])],
      // The launcher's own folder may be closed to the database's user: it works from the root folder.
      { cwd: '/', account, stdio: ['ignore', log, log], deathSignal: 'INT' },
    );
  } finally {
    closeSync(log);
  }
}

/** Containers often have 64 MB at /dev/shm: parallel queries would fail there for want of space. */
function sharedMemorySettings() {
  if (!existsSync('/dev/shm')) return {};
  const { blocks, bsize } = statfsSync('/dev/shm');
  return blocks * bsize < 512 * 1_024 * 1_024 ? { dynamic_shared_memory_type: 'mmap' } : {};
}

/**
 * @param {import('node:child_process').ChildProcess} child
 * @param {string} dataFolder
 * @param {number} giveUpAt
 * @param {AbortSignal} [signal]
 * @returns {Promise<Postmaster | null>} null when it ended instead
 */
async function waitUntilReady(child, dataFolder, giveUpAt, signal) {
  let ended = false;
  /** @type {Error | null} */
  let failure = null;
  child.once('exit', () => {
    ended = true;
  });
  child.once('error', (error) => {
    failure = error;
    ended = true;
  });
  while (!ended) {
    const state = readPostmasterFile(dataFolder);
    if (state !== null && state.pid === child.pid && state.ready)
      return { process: child, pid: state.pid, port: state.port };
    if (signal?.aborted || performance.now() > giveUpAt) {
      await stopPostmaster(child, 'fast');
      signal?.throwIfAborted();
      throw new LaunchError('PostgreSQL was not ready within five minutes.');
    }
    await delay(pollMs);
  }
  if (failure !== null) throw failure;
  return null;
}

/**
 * Stops the server and resolves when its process is gone.
 *
 * @param {import('node:child_process').ChildProcess} child
 * @param {'fast' | 'immediate'} mode `immediate` skips the last checkpoint: for clusters that are thrown away
 */
export async function stopPostmaster(child, mode) {
  if (child.exitCode !== null || child.signalCode !== null || child.pid === undefined) return;
  const { pid } = child;
  const ended = new Promise((resolve) => child.once('exit', resolve));
  signalProcess(pid, mode === 'fast' ? 'SIGINT' : 'SIGQUIT');
  // A forced end is safe, the next start recovers from the log; it only takes longer.
  const force = setTimeout(() => signalProcess(pid, 'SIGQUIT'), 30_000);
  const kill = setTimeout(() => signalProcess(pid, 'SIGKILL'), 40_000);
  await ended;
  clearTimeout(force);
  clearTimeout(kill);
}
