import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { createInterface } from 'node:readline';

export interface WorkerProcess {
  /** Ends it and resolves when it is gone: the exit code, or null after SIGKILL. */
  end(signal: 'SIGTERM' | 'SIGKILL'): Promise<number | null>;
}

/** The real worker as a process of its own; resolves when it says that it is listening. */
export async function startWorker(
  databaseUrl: string,
  env: Record<string, string> = {},
): Promise<WorkerProcess> {
  const child = spawn(process.execPath, ['--import', 'tsx', 'worker/main.ts'], {
    env: { PATH: process.env.PATH, DATABASE_URL: databaseUrl, FEED_RETRY_SECONDS: '0.1', ...env },
    stdio: ['ignore', 'pipe', 'pipe'],
  });
  const output: string[] = [];
  const closed = once(child, 'close') as Promise<[number | null]>;
  await new Promise<void>((resolve, reject) => {
    for (const stream of [child.stdout, child.stderr]) {
      createInterface({ input: stream }).on('line', (line) => {
        output.push(line);
        if (line.includes('"msg":"listening"')) resolve();
      });
    }
    void closed.then(([code]) => reject(new Error(`The worker ended with ${code}:\n${output.join('\n')}`)));
  });
  return {
    async end(signal) {
      child.kill(signal);
      const [code] = await closed;
      return code;
    },
  };
}
