import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { createBuffer, type BufferOptions } from './buffer.ts';

class Passing extends Error {}

beforeEach(() => {
  vi.useFakeTimers();
});
afterEach(() => {
  vi.useRealTimers();
});

/** A buffer of numbers over a list that stands for the database. */
function make(change: Partial<BufferOptions<number>> = {}) {
  const stored: number[] = [];
  const batches: number[][] = [];
  const refused: number[] = [];
  const events: string[] = [];
  let fail: (items: readonly number[]) => Error | null = () => null;
  const buffer = createBuffer<number>({
    write: async (items) => {
      const error = fail(items);
      if (error !== null) throw error;
      batches.push([...items]);
      stored.push(...items);
    },
    classify: (error) => (error instanceof Passing ? 'passing' : 'lasting'),
    onRefused: (item) => refused.push(item),
    onFull: () => events.push('full'),
    onRoom: () => events.push('room'),
    batchItems: 10,
    capacity: 40,
    ...change,
  });
  return {
    ...{ buffer, stored, batches, refused, events },
    failWith: (next: typeof fail) => {
      fail = next;
    },
  };
}

const range = (from: number, to: number): number[] => Array.from({ length: to - from }, (_, i) => from + i);

describe('the buffer', () => {
  it('writes what has waited for a second', async () => {
    const { buffer, batches } = make();
    buffer.add(1);
    await vi.advanceTimersByTimeAsync(600);
    buffer.add(2);
    expect(batches).toEqual([]);
    await vi.advanceTimersByTimeAsync(400);
    expect(batches).toEqual([[1, 2]]);
    expect(buffer.size()).toBe(0);
  });

  it('writes a full batch at once and the rest in order', async () => {
    const { buffer, batches } = make();
    for (const item of range(0, 25)) buffer.add(item);
    await vi.advanceTimersByTimeAsync(0);
    expect(batches).toEqual([range(0, 10), range(10, 20)]);
    await vi.advanceTimersByTimeAsync(1_000);
    expect(batches[2]).toEqual(range(20, 25));
  });

  it('tries a batch again until the database is back, in order, losing and doubling nothing', async () => {
    const { buffer, stored, refused, failWith } = make();
    failWith(() => new Passing('gone'));
    for (const item of range(0, 30)) buffer.add(item);
    await vi.advanceTimersByTimeAsync(600_000);
    expect(stored).toEqual([]);
    failWith(() => null);
    await vi.advanceTimersByTimeAsync(5_000);
    expect(stored).toEqual(range(0, 30));
    expect(refused).toEqual([]);
  });

  it('pauses longer after each failure, up to the limit', async () => {
    const pauses: number[] = [];
    const { buffer, failWith } = make({
      onRetry: (_error, pauseMs) => pauses.push(pauseMs),
      longestRetryMs: 1_000,
    });
    failWith(() => new Passing('gone'));
    buffer.add(1);
    await vi.advanceTimersByTimeAsync(6_000);
    expect(pauses.slice(0, 5)).toEqual([200, 400, 800, 1_000, 1_000]);
  });

  it('asks for a pause when it is full and for more when it is half empty', async () => {
    const { buffer, events, stored, failWith } = make();
    failWith(() => new Passing('gone'));
    for (const item of range(0, 45)) buffer.add(item);
    expect(events).toEqual(['full']);
    failWith(() => null);
    await vi.advanceTimersByTimeAsync(10_000);
    expect(events).toEqual(['full', 'room']);
    expect(stored).toEqual(range(0, 45));
  });

  it('stores everything but the rows at fault, which it refuses', async () => {
    const { buffer, stored, refused, failWith } = make();
    const bad = new Set([3, 4, 17]);
    failWith((items) => (items.some((item) => bad.has(item)) ? new Error('bad row') : null));
    for (const item of range(0, 20)) buffer.add(item);
    await vi.advanceTimersByTimeAsync(60_000);
    expect(refused).toEqual([3, 4, 17]);
    expect(stored).toEqual(range(0, 20).filter((item) => !bad.has(item)));
    expect(buffer.size()).toBe(0);
  });

  it('does not refuse a lone row whose failure passes', async () => {
    const { buffer, stored, refused, failWith } = make();
    let failures = 2;
    failWith(() => (failures-- > 0 ? new Error('odd') : null));
    buffer.add(1);
    await vi.advanceTimersByTimeAsync(10_000);
    expect([stored, refused]).toEqual([[1], []]);
  });

  it('stores what it holds when it is closed, without waiting for the second', async () => {
    const { buffer, stored } = make();
    for (const item of range(0, 5)) buffer.add(item);
    await expect(buffer.close(performance.now() + 1_000)).resolves.toBe(0);
    expect(stored).toEqual(range(0, 5));
  });

  it('says how many it could not store before the deadline', async () => {
    const { buffer, failWith } = make();
    failWith(() => new Passing('gone'));
    for (const item of range(0, 15)) buffer.add(item);
    const closed = buffer.close(performance.now() + 3_000);
    await vi.advanceTimersByTimeAsync(3_000);
    await expect(closed).resolves.toBe(15);
  });

  it('does not wait beyond the deadline for a database that never answers', async () => {
    const { buffer } = make({ write: () => new Promise(() => undefined) });
    buffer.add(1);
    const closed = buffer.close(performance.now() + 2_000);
    await vi.advanceTimersByTimeAsync(2_000);
    await expect(closed).resolves.toBe(1);
  });
});
