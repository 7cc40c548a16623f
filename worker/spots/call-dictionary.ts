import type { DataSource } from 'typeorm';

/** More than any season hears: past it the cache starts anew. */
const longestCache = 200_000;

/** Call sign -> id of the dictionary table, remembered by this process. */
export interface CallDictionary {
  /** The id of each call; calls never heard before are added. */
  resolve(calls: readonly string[]): Promise<Int32Array>;
  /** Forgets everything: what this process remembers may no longer be true of the database. */
  forget(): void;
}

export function createCallDictionary(dataSource: DataSource): CallDictionary {
  const known = new Map<string, number>();

  async function look(calls: readonly string[]): Promise<void> {
    const rows: { id: number; call: string }[] = await dataSource.query(
      'SELECT id, call FROM call_sign WHERE call = ANY($1)',
      [calls],
    );
    for (const { id, call } of rows) known.set(call, id);
  }

  /**
   * Outside of any transaction, so that a call is remembered only once it is there for good. Sorted, so
   * that two processes that add the same calls wait for each other in one order and cannot deadlock.
   */
  async function learn(unknown: string[]): Promise<void> {
    await look(unknown);
    const missing = unknown.filter((call) => !known.has(call)).sort();
    if (missing.length === 0) return;
    await dataSource.query(
      'INSERT INTO call_sign (call) SELECT unnest($1::text[]) ON CONFLICT (call) DO NOTHING',
      [missing],
    );
    await look(missing);
  }

  return {
    async resolve(calls) {
      const unknown = new Set<string>();
      for (const call of calls) if (!known.has(call)) unknown.add(call);
      if (known.size + unknown.size > longestCache) {
        // In one sweep, before this batch's own calls are looked at, so that none of them can be lost.
        known.clear();
        for (const call of calls) unknown.add(call);
      }
      if (unknown.size > 0) await learn([...unknown]);
      return Int32Array.from(calls, (call) => {
        const id = known.get(call);
        if (id === undefined) throw new Error(`The call sign ${call} could not be added to the dictionary.`);
        return id;
      });
    },
    forget: () => known.clear(),
  };
}
