import { once } from 'node:events';
import { join } from 'node:path';
import { createInterface } from 'node:readline';
import { setTimeout as delay } from 'node:timers/promises';
import { signalGroup, spawnChild } from './commands.mjs';
import { openLogFile } from './log-file.mjs';
import { LaunchError } from './terminal.mjs';

/**
 * Keeps the program's own processes running: starts them, writes their logs, starts a dead one
 * again after a growing pause, and ends them all in good order.
 */

/**
 * @typedef {object} ProcessPlan
 * @property {string} name a word for the terminal and the log file: "server"
 * @property {string[]} args for this Node
 * @property {NodeJS.ProcessEnv} env
 * @property {string} [readyUrl] answers 200 as soon as the process can work
 */

const firstPauseMs = 500;
const longestPauseMs = 30_000;
const provenAfterMs = 30_000;
const deathsBeforeReady = 3;
const tailLines = 12;

/**
 * @param {{ root: string, logFolder: string, say: (text: string) => void, drainMs?: number }} options
 *   `drainMs`: how long the processes may take to finish their work when they are asked to end
 */
export function createSupervisor({ root, logFolder, say, drainMs = 10_000 }) {
  const stopping = new AbortController();
  /** @type {Map<string, import('node:child_process').ChildProcess>} */
  const running = new Map();
  /** @type {Promise<void>[]} */
  const keepers = [];

  /**
   * @param {ProcessPlan} plan
   * @param {{ deaths: number, tail: string[] }} record
   */
  const keep = async (plan, record) => {
    const log = openLogFile(join(logFolder, `${plan.name}.log`));
    let pauseMs = firstPauseMs;
    while (!stopping.signal.aborted) {
      const startedAt = performance.now();
      const child = spawnChild(process.execPath, plan.args, {
        cwd: root,
        env: plan.env,
        stdio: ['ignore', 'pipe', 'pipe'],
      });
      running.set(plan.name, child);
      for (const stream of [child.stdout, child.stderr]) {
        createInterface({ input: /** @type {NodeJS.ReadableStream} */ (stream) }).on('line', (line) => {
          record.tail = [...record.tail.slice(1 - tailLines), line];
          log.write(line);
        });
      }
      const [code, signal] = await once(child, 'close');
      running.delete(plan.name);
      // Whatever it had started must not live on beside its successor.
      signalGroup(child.pid, 'SIGKILL');
      if (stopping.signal.aborted) break;
      record.deaths += 1;
      if (performance.now() - startedAt > provenAfterMs) pauseMs = firstPauseMs;
      const how = signal === null ? `exit code ${code}` : `signal ${signal}`;
      say(
        `The ${plan.name} has stopped (${how}); starting it again in ${pauseMs / 1_000} s. See ${join(logFolder, `${plan.name}.log`)}`,
      );
      await delay(pauseMs, undefined, { signal: stopping.signal }).catch(() => undefined);
      pauseMs = Math.min(pauseMs * 2, longestPauseMs);
    }
    log.close();
  };

  return {
    /**
     * Starts a process and, when it has a `readyUrl`, waits until that answers.
     *
     * @param {ProcessPlan} plan
     * @param {AbortSignal} [signal]
     */
    async start(plan, signal) {
      /** @type {{ deaths: number, tail: string[] }} */
      const record = { deaths: 0, tail: [] };
      keepers.push(keep(plan, record));
      if (plan.readyUrl === undefined) return;
      while (!(await answers(plan.readyUrl))) {
        signal?.throwIfAborted();
        if (record.deaths >= deathsBeforeReady) {
          throw new LaunchError(
            `The ${plan.name} does not start. Its last words:\n${record.tail.join('\n')}`,
          );
        }
        await delay(100, undefined, { signal });
      }
    },

    /** Process ids by name, of those running at this moment. */
    pids() {
      return Object.fromEntries([...running].map(([name, child]) => [name, child.pid]));
    },

    /** Asks all to end, gives them `drainMs`, then forces them. Resolves when all are gone. */
    async stop() {
      stopping.abort();
      for (const child of running.values()) signalGroup(child.pid, 'SIGTERM');
      const force = setTimeout(() => {
        for (const [name, child] of running) {
          say(`The ${name} did not finish within ${drainMs / 1_000} s and was ended by force.`);
          signalGroup(child.pid, 'SIGKILL');
        }
      }, drainMs);
      await Promise.all(keepers);
      clearTimeout(force);
    },

    /** For those who will not wait: ends all at once. */
    kill() {
      stopping.abort();
      for (const child of running.values()) signalGroup(child.pid, 'SIGKILL');
    },
  };
}

/** @param {string} url */
async function answers(url) {
  try {
    const response = await fetch(url, { signal: AbortSignal.timeout(5_000) });
    await response.body?.cancel();
    return response.status === 200;
  } catch {
    return false;
  }
}
