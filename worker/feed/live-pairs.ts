import type { DataSource } from 'typeorm';
import { readRecentPairs } from '../../server/database/recent-pairs.ts';
import type { LivePair } from '../../shared/contracts/tonight.ts';
import type { Logger } from '../../server/platform/logger.ts';
import { publish } from '../../server/platform/notify.ts';
import type { SpotRecord } from '../spots/spot-record.ts';

/** As many as one event carries. */
const mostPairs = 20;
/** A screen shows the newest; a flood of spots must not hold up the writer's database. */
const mostSpots = 5_000;
const shortestPauseMs = 1_000;

/**
 * Tells the browsers of stations that two receivers on two antennas have just heard together. Works from
 * the stored spots, because the two receivers may come by different feeds in different workers; each
 * worker looks for the pairs of what it has stored itself.
 */
export function createLivePairs(dataSource: DataSource, logger: Logger) {
  const waiting = new Map<number, SpotRecord[]>();
  const working = new Map<number, Promise<void>>();
  let stopped = false;

  async function look(stationId: number): Promise<void> {
    const fresh = waiting.get(stationId) ?? [];
    waiting.delete(stationId);
    const pairs = await readNewPairs(dataSource, stationId, fresh);
    if (pairs.length > 0) await publish(dataSource.manager, stationId, { type: 'pairs', pairs });
  }

  function work(stationId: number): void {
    if (working.has(stationId) || stopped) return;
    const run = look(stationId)
      .catch((error: unknown) =>
        logger.warn({ err: error, station: stationId }, 'live pairs could not be told'),
      )
      .then(() => new Promise<void>((resolve) => setTimeout(resolve, stopped ? 0 : shortestPauseMs)))
      .finally(() => {
        working.delete(stationId);
        if (waiting.has(stationId)) work(stationId);
      });
    working.set(stationId, run);
  }

  return {
    /** Spots that were stored just now. */
    add(stationId: number, spots: readonly SpotRecord[]): void {
      const list = [...(waiting.get(stationId) ?? []), ...spots];
      waiting.set(stationId, list.slice(-mostSpots));
      work(stationId);
    },
    async stop(): Promise<void> {
      stopped = true;
      await Promise.all(working.values());
    },
  };
}

/** Pairs of which at least one spot is among the fresh ones, newest first, at most 20. */
export async function readNewPairs(
  dataSource: DataSource,
  stationId: number,
  fresh: readonly SpotRecord[],
): Promise<LivePair[]> {
  if (fresh.length === 0) return [];
  const freshKeys = new Set(fresh.map((spot) => keyOf(spot.heardAtMs, spot.receiverId, spot.call)));
  const times = fresh.map((spot) => spot.heardAtMs);
  return readRecentPairs(dataSource, stationId, {
    fromMs: Math.min(...times),
    toMs: Math.max(...times),
    limit: mostPairs,
    wanted: (spot) => freshKeys.has(keyOf(spot.timeMs, spot.receiver, spot.call)),
  });
}

const keyOf = (timeMs: number, receiver: number, call: string): string => `${timeMs} ${receiver} ${call}`;
