import { execFileSync, spawn } from 'node:child_process';
import type { ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { chmodSync, cpSync, existsSync, mkdtempSync, readFileSync, readdirSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { createInterface } from 'node:readline';
import { vi } from 'vitest';
import { makeCluster } from '../../server/launch/cluster.mjs';
import type { Account } from '../../server/launch/commands.mjs';
import { databaseAccount } from '../../server/launch/debian.mjs';

export interface LaunchedScript {
  child: ChildProcess;
  /** What it printed so far, stdout and stderr together. */
  lines: string[];
  /** Resolves with the first line that matches, printed already or still to come; fails when it ends without one. */
  waitForLine(pattern: RegExp): Promise<string>;
  /** Sends the signal and resolves with the exit code (null after a signal's death) when all its output is in. */
  end(signal: NodeJS.Signals): Promise<number | null>;
}

export interface Workshop {
  folder: string;
  /** Runs a module that may import the launch code as `./launch/<file>.mjs`, in a process of its own. */
  run(source: string, account?: Account | null): LaunchedScript;
  /** Ends what still runs and removes the folder. */
  close(): Promise<void>;
}

/**
 * A temporary folder, open to every user of the machine, with a copy of the launch code: a launcher in here
 * can be killed, started by another user and looked at from outside, as the real one is.
 */
export function openWorkshop(): Workshop {
  const folder = mkdtempSync(join(tmpdir(), 'launch-workshop-'));
  chmodSync(folder, 0o755);
  cpSync('server/launch', join(folder, 'launch'), {
    recursive: true,
    filter: (path) => !path.endsWith('.test.ts'),
  });
  const scripts: LaunchedScript[] = [];
  return {
    folder,
    run(source, account = null) {
      const script = launchScript(folder, source, account);
      scripts.push(script);
      return script;
    },
    async close() {
      for (const { child, end } of scripts)
        if (child.exitCode === null && child.signalCode === null) await end('SIGKILL');
      // The kernel ends the rest; a database may need a moment to do so.
      await vi.waitFor(() => rmSync(folder, { recursive: true, force: true }), { timeout: 10_000 });
    },
  };
}

function launchScript(folder: string, source: string, account: Account | null): LaunchedScript {
  const child = spawn(process.execPath, ['--input-type=module', '-e', source], {
    cwd: folder,
    env: { PATH: process.env.PATH, TMPDIR: process.env.TMPDIR },
    stdio: ['ignore', 'pipe', 'pipe'],
    ...(account === null ? {} : { uid: account.uid, gid: account.gid }),
  });
  const lines: string[] = [];
  const closed = once(child, 'close') as Promise<[number | null]>;
  const readers = [child.stdout, child.stderr].map((input) => createInterface({ input }));
  for (const reader of readers) reader.on('line', (line) => lines.push(line));
  return {
    child,
    lines,
    waitForLine(pattern) {
      return new Promise((resolve, reject) => {
        const look = () => {
          const line = lines.find((one) => pattern.test(one));
          if (line !== undefined) resolve(line);
        };
        for (const reader of readers) reader.on('line', look);
        void closed.then(() =>
          reject(new Error(`The script ended without ${pattern}:\n${lines.join('\n')}`)),
        );
        look();
      });
    },
    async end(signal) {
      child.kill(signal);
      const [code] = await closed;
      return code;
    },
  };
}

/** Processes that mention the text in their command line or work in a folder below it; the dead do not count. */
export function processesMentioning(text: string): number[] {
  return readdirSync('/proc')
    .filter((name) => /^\d+$/.test(name) && Number(name) !== process.pid)
    .map(Number)
    .filter((pid) => isAlive(pid) && readFile(`/proc/${pid}/cmdline`).includes(text));
}

export function isAlive(pid: number): boolean {
  return existsSync(`/proc/${pid}`) && !/^State:\s+[ZX]/m.test(readFile(`/proc/${pid}/status`));
}

function readFile(path: string): string {
  try {
    return readFileSync(path, 'utf8');
  } catch {
    return '';
  }
}

export interface PreparedCluster {
  /** Puts a copy at `home`, owned as the original. */
  copyTo(home: string): void;
  remove(): void;
}

/** A cluster made once for a test file, without waiting for the disk: making one takes longer than most tests. */
export async function prepareCluster(): Promise<PreparedCluster> {
  const account = databaseAccount();
  const folder = mkdtempSync(join(tmpdir(), 'launch-prepared-'));
  chmodSync(folder, 0o755);
  const home = join(folder, 'postgres');
  await makeCluster({ home, account, durable: false });
  return {
    copyTo: (place) => execFileSync('cp', ['-a', home, place]),
    remove: () => rmSync(folder, { recursive: true, force: true }),
  };
}
