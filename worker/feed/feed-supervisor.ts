import type { DataSource } from 'typeorm';
import type { Logger } from '../../server/platform/logger.ts';
import type { SpotRecord } from '../spots/spot-record.ts';
import { createFeedClaims } from './feed-claims.ts';
import { createFeedReader, type FeedReader, type FeedReaderOptions, type FeedRow } from './feed-reader.ts';
import { createReceiverNames, type ReceiverNames } from './receiver-names.ts';

export interface FeedSupervisorOptions {
  dataSource: DataSource;
  databaseUrl: string;
  logger: Logger;
  onStored: (stationId: number, spots: readonly SpotRecord[]) => void;
  connection?: FeedReaderOptions['connection'];
  health?: FeedReaderOptions['health'];
  /** How often the feeds are looked at without being told; 2 s unless told. */
  pollSeconds?: number;
}

export interface FeedSupervisor {
  start(): void;
  /** Feeds or receivers may have changed. */
  wake(): void;
  /** Stops all feeds and stores what they have read, within the time given. */
  stop(withinMs: number): Promise<void>;
}

interface Running {
  row: FeedRow;
  reader: FeedReader;
}

/** How long a feed that is switched off may take to store its last lines. */
const stopWithinMs = 8_000;

/**
 * Reads every enabled feed exactly once over any number of workers, follows changes of the feeds and of
 * the receivers, and takes over the feeds of a worker that died.
 */
export function createFeedSupervisor(options: FeedSupervisorOptions): FeedSupervisor {
  const { dataSource, databaseUrl, logger, onStored, pollSeconds = 2 } = options;
  const running = new Map<number, Running>();
  const claims = createFeedClaims(databaseUrl, logger, () => wake());
  let stopped = false;
  let timer: NodeJS.Timeout | null = null;
  let looking: Promise<void> | null = null;
  let lookAgain = false;

  async function look(): Promise<void> {
    const { fresh } = await claims.ensure();
    // The database was away, not we: feeds were read on all the while and their lines kept. Only if
    // another worker has one now do we leave it; what it stores twice meanwhile is dropped by the writer.
    if (fresh)
      for (const feedId of running.keys()) if (!(await claims.take(feedId))) await end(feedId, false);
    const wanted = await readFeeds();
    const receivers = await readReceivers();
    const noReceivers = createReceiverNames([]);
    for (const [feedId, { row }] of running) {
      const now = wanted.get(feedId);
      if (now === undefined || !sameFeed(now, row)) await end(feedId, true);
    }
    for (const [feedId, row] of wanted) {
      if (stopped) return;
      const names = receivers.get(row.stationId) ?? noReceivers;
      const already = running.get(feedId);
      if (already !== undefined) already.reader.setReceivers(names);
      else if (await claims.take(feedId)) await begin(row, names);
    }
  }

  async function begin(row: FeedRow, receivers: ReceiverNames): Promise<void> {
    const { connection, health } = options;
    const reader = createFeedReader({
      dataSource,
      logger,
      feed: row,
      receivers,
      onStored,
      connection,
      health,
    });
    try {
      await reader.start();
    } catch (error) {
      await claims.give(row.feedId);
      throw error;
    }
    running.set(row.feedId, { row, reader });
  }

  async function end(feedId: number, ours: boolean): Promise<void> {
    const feed = running.get(feedId);
    running.delete(feedId);
    await feed?.reader.stop(performance.now() + stopWithinMs);
    // Only after its last line is stored may another worker begin.
    if (ours) await claims.give(feedId);
  }

  async function readFeeds(): Promise<Map<number, FeedRow>> {
    const rows: FeedRow[] = await dataSource.query(
      `SELECT station_id AS "stationId", id AS "feedId", host, port, login_call AS "loginCall"
       FROM feed WHERE enabled ORDER BY station_id, id`,
    );
    return new Map(rows.map((row) => [row.feedId, row]));
  }

  /** A retired receiver's lines are not the station's any more. */
  async function readReceivers(): Promise<Map<number, ReceiverNames>> {
    const rows: { station_id: number; id: number; call_sign: string }[] = await dataSource.query(
      `SELECT r.station_id, r.id, r.call_sign FROM receiver r
       WHERE r.retired_at IS NULL
         AND EXISTS (SELECT FROM feed f WHERE f.station_id = r.station_id AND f.enabled)`,
    );
    const byStation = new Map<number, { id: number; callSign: string }[]>();
    for (const { station_id, id, call_sign } of rows) {
      const list = byStation.get(station_id) ?? [];
      list.push({ id, callSign: call_sign });
      byStation.set(station_id, list);
    }
    return new Map([...byStation].map(([stationId, list]) => [stationId, createReceiverNames(list)]));
  }

  function wake(): void {
    lookAgain = true;
    if (stopped || looking !== null) return;
    lookAgain = false;
    looking = look()
      .catch((error: unknown) =>
        logger.warn({ err: error }, 'the feeds could not be looked at; trying again'),
      )
      .finally(() => {
        looking = null;
      });
    void looking.then(() => {
      if (lookAgain) wake();
    });
  }

  return {
    start() {
      timer = setInterval(wake, pollSeconds * 1000);
      wake();
    },
    wake,
    async stop(withinMs) {
      stopped = true;
      if (timer !== null) clearInterval(timer);
      const deadlineMs = performance.now() + withinMs;
      await Promise.race([looking, new Promise((resolve) => setTimeout(resolve, withinMs).unref())]);
      await Promise.all([...running.values()].map(({ reader }) => reader.stop(deadlineMs)));
      running.clear();
      await claims.stop();
    },
  };
}

function sameFeed(one: FeedRow, other: FeedRow): boolean {
  return one.host === other.host && one.port === other.port && one.loginCall === other.loginCall;
}
