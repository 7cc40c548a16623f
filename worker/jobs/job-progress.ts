import type { JobProgress } from './job-store.ts';

/** A person sees no finer steps, and each one is a transaction and a message to every browser. */
const shortestPauseMs = 500;

/**
 * Writes progress at most every half second, never two at once, always the newest. A failed write is
 * dropped: the next one says more.
 */
export function createProgressWriter(write: (progress: JobProgress) => Promise<void>) {
  const startedMs = performance.now();
  let first: { done: number; atMs: number } | null = null;
  let latest: { done: number; total: number } | null = null;
  let writing: Promise<void> | null = null;
  let timer: NodeJS.Timeout | null = null;
  let lastWriteMs = Number.NEGATIVE_INFINITY;

  function secondsLeft(done: number, total: number): number | null {
    // From where this attempt began: what an earlier one has done says nothing of this one's speed.
    if (first === null || done <= first.done) return null;
    const msPerStep = (performance.now() - first.atMs) / (done - first.done);
    return Math.ceil((Math.max(0, total - done) * msPerStep) / 1000);
  }

  async function flush(): Promise<void> {
    if (latest === null) return;
    const { done, total } = latest;
    latest = null;
    lastWriteMs = performance.now();
    await write({ done, total, secondsLeft: secondsLeft(done, total) }).catch(() => undefined);
  }

  function schedule(): void {
    if (timer !== null || writing !== null || latest === null) return;
    const waitMs = Math.max(0, lastWriteMs + shortestPauseMs - performance.now());
    timer = setTimeout(() => {
      timer = null;
      writing = flush().finally(() => {
        writing = null;
        schedule();
      });
    }, waitMs);
  }

  return {
    report(done: number, total: number): void {
      first ??= { done, atMs: startedMs };
      latest = { done, total };
      schedule();
    },
    /** Writes what is still to be written; nothing is written after this. */
    async finish(): Promise<void> {
      if (timer !== null) clearTimeout(timer);
      timer = null;
      await writing;
      if (timer !== null) clearTimeout(timer);
      await flush();
    },
  };
}
