/** How a failed write is to be taken. */
export type FailureKind =
  /** The database is away, full or busy: the same batch will do later. */
  | 'passing'
  /** Something in the batch is at fault, or nobody knows. */
  | 'lasting';

export interface BufferOptions<Item> {
  /** Stores all of a batch or nothing. */
  write: (items: readonly Item[]) => Promise<void>;
  /** What kind of failure this is. */
  classify: (error: unknown) => FailureKind;
  /** An item that could not be stored by itself either. */
  onRefused: (item: Item, error: unknown) => void;
  /** Told that there is no more room: stop reading, and go on again. */
  onFull: () => void;
  onRoom: () => void;
  onRetry?: (error: unknown, pauseMs: number) => void;
  /** A batch is written at this size, or ... */
  batchItems?: number;
  /** ... when its first item has waited for this long. */
  flushMs?: number;
  /** Items held at most, being written ones included. Reading stops here and goes on at half of it. */
  capacity?: number;
  /** The pause after a passing failure, doubled up to `longestRetryMs`. */
  retryMs?: number;
  longestRetryMs?: number;
}

export interface Buffer<Item> {
  add(item: Item): void;
  /** Items not stored yet. */
  size(): number;
  /** Resolves when everything added so far is stored or refused. */
  drain(): Promise<void>;
  /** Stores what it can before the deadline, in `performance.now()` milliseconds; returns how many items were lost. */
  close(deadlineMs: number): Promise<number>;
}

/** A single item is given this many chances before it is refused: the fault may not be its own. */
const chances = 3;

/**
 * Between a feed and the database: bounded, written by size or time, one batch at a time and in order.
 * A batch that cannot be stored for a passing reason is tried again until it is; one that fails for a
 * lasting reason is halved until the rows at fault are alone, so that one bad row never blocks the rest.
 * Nothing is dropped but at the deadline of `close`.
 */
export function createBuffer<Item>(options: BufferOptions<Item>): Buffer<Item> {
  const { write, classify, onRefused, onFull, onRoom, onRetry } = options;
  const { batchItems = 5_000, flushMs = 1_000, capacity = 50_000 } = options;
  const { retryMs = 200, longestRetryMs = 5_000 } = options;
  let waiting: Item[] = [];
  let writing = 0;
  let full = false;
  let timer: NodeJS.Timeout | null = null;
  let work: Promise<void> | null = null;
  let closing = false;
  let deadlineMs = Number.POSITIVE_INFINITY;
  /** Ends the present pause early. */
  let hurry: () => void = () => undefined;

  const size = (): number => waiting.length + writing;

  function arm(): void {
    if (work !== null || waiting.length === 0) return;
    if (closing || waiting.length >= batchItems) start();
    else timer ??= setTimeout(start, flushMs);
  }

  function start(): void {
    if (timer !== null) clearTimeout(timer);
    timer = null;
    if (work !== null) return;
    work = flush().finally(() => {
      work = null;
      arm();
    });
  }

  async function flush(): Promise<void> {
    const batch = waiting.slice(0, batchItems);
    waiting = waiting.slice(batch.length);
    writing = batch.length;
    await store(batch);
    if (full && size() <= capacity / 2) {
      full = false;
      onRoom();
    }
  }

  function settle(items: number): void {
    writing -= items;
  }

  async function store(items: readonly Item[]): Promise<void> {
    let failures = 0;
    for (let pauseMs = retryMs; ; pauseMs = Math.min(pauseMs * 2, longestRetryMs)) {
      if (performance.now() >= deadlineMs) return;
      try {
        await write(items);
        return settle(items.length);
      } catch (error) {
        if (classify(error) === 'lasting') {
          failures += 1;
          if (items.length > 1) break;
          if (failures >= chances) {
            onRefused(items[0]!, error);
            return settle(1);
          }
        }
        onRetry?.(error, pauseMs);
        await pause(pauseMs);
      }
    }
    const middle = items.length >> 1;
    await store(items.slice(0, middle));
    await store(items.slice(middle));
  }

  function pause(ms: number): Promise<void> {
    const untilDeadline = Math.min(ms, Math.max(0, deadlineMs - performance.now()));
    return new Promise((resolve) => {
      const pausing = setTimeout(resolve, untilDeadline);
      hurry = () => {
        clearTimeout(pausing);
        resolve();
      };
    });
  }

  /** A write to a database that does not answer may never end. */
  function pastDeadline(): Promise<void> {
    return new Promise((resolve) => {
      setTimeout(resolve, Math.max(0, deadlineMs - performance.now())).unref();
    });
  }

  async function drain(): Promise<void> {
    while (size() > 0 && performance.now() < deadlineMs) {
      start();
      await work;
    }
  }

  return {
    add(item) {
      waiting.push(item);
      if (!full && size() >= capacity) {
        full = true;
        onFull();
      }
      arm();
    },
    size,
    drain,
    async close(deadline) {
      closing = true;
      deadlineMs = deadline;
      // A long pause would eat up the time that is left.
      hurry();
      await Promise.race([drain(), pastDeadline()]);
      return size();
    },
  };
}
