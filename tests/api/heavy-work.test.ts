import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { answerComparison } from '../../shared/comparison/index.ts';
import type { ComparisonInput } from '../../shared/comparison/index.ts';
import { createThreadPool, type HeavyWork } from '../../server/platform/heavy-work.ts';
import { askSample } from '../reference/sample-station/ask.ts';

/** Real threads, as in production but for TypeScript, which they read by themselves. */
let pool: HeavyWork;
beforeAll(() => {
  pool = createThreadPool({
    file: new URL('../../server/threads/thread.ts', import.meta.url),
    execArgv: ['--import', 'tsx'],
  });
});
afterAll(() => pool.close());

/** The sample station's units over and over: some hundred thousand, which keep a thread busy for seconds. */
function manyTimes(input: ComparisonInput, times: number): ComparisonInput {
  const units = Object.fromEntries(
    Object.entries(input.units).map(([name, values]) => {
      const column = values as Float64Array;
      const long = new (column.constructor as Float64ArrayConstructor)(column.length * times);
      for (let k = 0; k < times; k++) long.set(column, k * column.length);
      return [name, long];
    }),
  ) as unknown as ComparisonInput['units'];
  return { ...input, units };
}

describe('work in threads', () => {
  it('gives the very answer that this thread would give', async () => {
    const input = askSample('swap', 'ALPHA', 'BRAVO');
    expect(await pool.run('answerComparison', input)).toEqual(answerComparison(input));
  });

  it('leaves this thread free to do other things', async () => {
    const answer = pool.run('answerComparison', manyTimes(askSample('swap', 'ALPHA', 'BRAVO'), 100));
    let turns = 0;
    let busy = true;
    void answer.finally(() => (busy = false));
    while (busy) {
      turns++;
      await new Promise((resolve) => setImmediate(resolve));
    }
    // Worked out in this thread, the loop would have come round once or twice.
    expect(turns).toBeGreaterThan(100);
    expect((await answer).counts.units).toBe(132_200);
  });

  it('is broken off when nobody waits for it any more, and the pool goes on', async () => {
    const gone = new AbortController();
    const given = manyTimes(askSample('swap', 'ALPHA', 'BRAVO'), 400);
    const answer = pool.run('answerComparison', given, gone.signal);
    // Taken up by a thread and not yet done: the next turn of the loop is milliseconds away, the answer seconds.
    await new Promise((resolve) => setImmediate(resolve));
    gone.abort();
    await expect(answer).rejects.toMatchObject({ name: 'AbortError' });
    const next = await pool.run('answerComparison', askSample('alternate', 'ALPHA', 'BRAVO'));
    expect(next.counts.units).toBe(1027);
  });

  it('hands on the error of a task', async () => {
    const broken = { ...askSample('swap', 'ALPHA', 'BRAVO'), marginDb: -1 };
    await expect(pool.run('answerComparison', broken)).rejects.toThrow(/margin must be/);
  });
});
