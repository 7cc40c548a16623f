import { spawn } from 'node:child_process';
import { existsSync } from 'node:fs';
import { createInterface } from 'node:readline';
import { LaunchError } from './terminal.mjs';

/**
 * Children that cannot outlive this process.
 *
 * Each child runs in a session of its own, so that Ctrl-C reaches the launcher only and the
 * launcher decides the order of stopping. That alone would leave orphans behind when the launcher
 * is killed with -9; the kernel's parent-death signal (set through util-linux's `setpriv`, an
 * essential Debian package) closes that hole.
 */

/** @typedef {{ uid: number, gid: number, name: string, home: string }} Account */

const setpriv = ['/usr/bin/setpriv', '/bin/setpriv'].find((path) => existsSync(path));

/**
 * @param {string} command
 * @param {string[]} args
 * @param {{
 *   cwd: string,
 *   env?: NodeJS.ProcessEnv,
 *   account?: Account | null,
 *   stdio?: import('node:child_process').StdioOptions,
 *   deathSignal?: 'TERM' | 'INT' | 'KILL' | 'QUIT' | null,
 * }} options `account`: run as that user (the launcher must be root); null deathSignal: the child
 *   may outlive us, for work that must not be cut off
 */
export function spawnChild(command, args, options) {
  const { cwd, env = process.env, account = null, stdio = 'ignore', deathSignal = 'TERM' } = options;
  const bound = deathSignal !== null && setpriv !== undefined;
  return spawn(bound ? setpriv : command, bound ? ['--pdeathsig', deathSignal, command, ...args] : args, {
    cwd,
    env: account === null ? env : { ...env, HOME: account.home, USER: account.name, LOGNAME: account.name },
    stdio,
    detached: true,
    ...(account === null ? {} : { uid: account.uid, gid: account.gid }),
  });
}

/**
 * Sends a signal to a child and everything it started; a child that is gone already is no error.
 *
 * @param {number | undefined} pid
 * @param {NodeJS.Signals} signal
 */
export function signalGroup(pid, signal) {
  if (pid === undefined) return;
  try {
    process.kill(-pid, signal);
  } catch (error) {
    if (/** @type {NodeJS.ErrnoException} */ (error).code !== 'ESRCH') throw error;
  }
}

/** @typedef {{ code: number, output: string }} Outcome `output`: stdout and stderr as they came */

/**
 * Runs a command to its end and collects what it said.
 *
 * @param {string} command
 * @param {string[]} args
 * @param {{
 *   cwd: string,
 *   env?: NodeJS.ProcessEnv,
 *   account?: Account | null,
 *   input?: string,
 *   signal?: AbortSignal,
 *   deathSignal?: 'TERM' | null,
 *   onLine?: (line: string) => void,
 * }} options
 * @returns {Promise<Outcome>}
 */
export async function run(command, args, options) {
  const { signal, onLine, input, ...rest } = options;
  signal?.throwIfAborted();
  const child = spawnChild(command, args, {
    ...rest,
    stdio: [input === undefined ? 'ignore' : 'pipe', 'pipe', 'pipe'],
  });
  /** @type {string[]} */
  const lines = [];
  for (const stream of [child.stdout, child.stderr]) {
    if (stream === null) continue;
    createInterface({ input: stream }).on('line', (line) => {
      lines.push(line);
      onLine?.(line);
    });
  }
  // A command that ends without reading its input breaks the pipe; its exit code tells the story.
  child.stdin?.on('error', () => undefined).end(input);
  const stop = () => signalGroup(child.pid, 'SIGTERM');
  signal?.addEventListener('abort', stop, { once: true });
  try {
    const code = await new Promise((resolve, reject) => {
      child.once('error', reject);
      child.once('close', (exitCode) => resolve(exitCode ?? 1));
    });
    signal?.throwIfAborted();
    return { code, output: lines.join('\n') };
  } catch (error) {
    if (/** @type {NodeJS.ErrnoException} */ (error).code === 'ENOENT') {
      throw new LaunchError(`The program ${command} was not found on this machine.`);
    }
    throw error;
  } finally {
    signal?.removeEventListener('abort', stop);
  }
}

/**
 * As `run`, but anything else than exit code 0 is a failure that shows the command's last words.
 *
 * @param {string} command
 * @param {string[]} args
 * @param {Parameters<typeof run>[2] & { purpose: string }} options `purpose`: "install the packages"
 */
export async function runOrFail(command, args, options) {
  const { purpose, ...rest } = options;
  const { code, output } = await run(command, args, rest);
  if (code !== 0)
    throw new LaunchError(
      `Could not ${purpose} (${command} ended with code ${code}):\n${lastLines(output, 30)}`,
    );
  return output;
}

/**
 * @param {string} text
 * @param {number} count
 */
export function lastLines(text, count) {
  return text.trimEnd().split('\n').slice(-count).join('\n');
}
