import { availableParallelism } from 'node:os';
import { Piscina } from 'piscina';
import { tasks, type TaskInput, type TaskName, type TaskOutput } from '../threads/tasks.ts';
import { Unavailable } from './errors.ts';

/** Statistics and drawing, off the event loop: while a season is worked out, everybody else is served. */
export interface HeavyWork {
  /**
   * Rejects with the task's error, with an AbortError when the signal is aborted (the thread is ended, however
   * deep in its work it is), or with Unavailable when too many wait already.
   */
  run<Name extends TaskName>(
    name: Name,
    input: TaskInput<Name>,
    signal?: AbortSignal,
  ): Promise<TaskOutput<Name>>;
  close(): Promise<void>;
}

export interface ThreadPoolSettings {
  /** The built `server/threads/thread.ts`. */
  file: URL;
  /** For threads that run TypeScript, in tests. */
  execArgv?: string[];
}

/** More than this many people do not wait for the same two processors: say so instead. */
const longestQueue = 64;

export function createThreadPool({ file, execArgv = [] }: ThreadPoolSettings): HeavyWork {
  const pool = new Piscina({
    filename: file.href,
    execArgv,
    minThreads: 1,
    // One processor stays for the event loop and the database.
    maxThreads: Math.max(1, availableParallelism() - 1),
    maxQueue: longestQueue,
    idleTimeout: 60_000,
  });
  return {
    async run(name, input, signal) {
      if (pool.queueSize >= longestQueue)
        throw new Unavailable('Too many answers are being worked out. Try again in a moment.');
      return pool.run({ name, input }, { signal }) as never;
    },
    close: () => pool.close({ force: true }),
  };
}

/** The same without threads: for tests, and wherever a thread would cost more than it saves. */
export function createInlineWork(): HeavyWork {
  return {
    async run(name, input, signal) {
      signal?.throwIfAborted();
      const task = tasks[name] as (given: unknown) => unknown;
      return (await task(input)) as never;
    },
    close: () => Promise.resolve(),
  };
}
