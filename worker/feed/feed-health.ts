import type { DataSource } from 'typeorm';
import type { FeedState } from '../../server/database/entities/feed-health.ts';
import { inTransaction } from '../../server/database/transaction.ts';
import type { Logger } from '../../server/platform/logger.ts';
import { publish } from '../../server/platform/notify.ts';
import type { ConnectionState } from './feed-connection.ts';

export interface FeedHealthOptions {
  dataSource: DataSource;
  logger: Logger;
  stationId: number;
  feedId: number;
  /** Connected, but without a line for this long: "silent". */
  silentAfterMs?: number;
  /** The row is written at most this often. */
  writeEveryMs?: number;
}

export interface FeedHealth {
  /** Makes sure that the row is there and begins to keep it up to date. */
  start(): Promise<void>;
  line(arrivedAtMs: number): void;
  /** A spot of a receiver that is not the station's. */
  otherReceiver(): void;
  connection(state: ConnectionState, error: string | null): void;
  /** Something is wrong that a person should see; null when it is over. */
  trouble(sentence: string | null): void;
  /** Writes a last time: "off", when the feed was switched off or this worker stops. */
  stop(): Promise<void>;
}

const bucketMs = 1_000;
const buckets = 60;

/**
 * What a person sees of a feed. Counts of stored, doubled and refused lines are not kept here: they are
 * written with the spots, in one transaction.
 */
export function createFeedHealth(options: FeedHealthOptions): FeedHealth {
  const { dataSource, logger, stationId, feedId, silentAfterMs = 180_000, writeEveryMs = 2_000 } = options;
  let link: ConnectionState = 'connecting';
  let connectedAt: Date | null = null;
  let connectedAtMs = 0;
  let lastLineAt: Date | null = null;
  let lastLineMs = 0;
  let linkError: string | null = null;
  let troubleSentence: string | null = null;
  let lines = 0;
  let others = 0;
  // Lines of each of the last 60 seconds; the index is the second, so that old ones are written over.
  const perSecond = new Uint32Array(buckets);
  const secondOf = new Float64Array(buckets);
  let timer: NodeJS.Timeout | null = null;
  let writing: Promise<void> | null = null;
  let written = '';

  function state(): FeedState {
    if (link !== 'connected') return link;
    const since = Math.max(lastLineMs, connectedAtMs);
    if (performance.now() - since > silentAfterMs) return 'silent';
    return lastLineMs > 0 ? 'receiving' : 'connecting';
  }

  function linesLastMinute(): number {
    const now = Math.floor(performance.now() / bucketMs);
    let sum = 0;
    for (let i = 0; i < buckets; i++) if (now - secondOf[i]! < buckets) sum += perSecond[i]!;
    return sum;
  }

  async function write(as: FeedState): Promise<void> {
    const [newLines, newOthers] = [lines, others];
    const shown = [as, connectedAt, lastLineAt, linesLastMinute(), troubleSentence ?? linkError];
    const key = JSON.stringify([...shown, newLines, newOthers]);
    if (key === written) return;
    await inTransaction(dataSource, async (manager) => {
      await manager.query(
        `UPDATE feed_health SET state = $3, connected_at = $4, last_line_at = $5, lines_last_minute = $6,
           last_error = $7, lines_total = lines_total + $8, other_receiver_total = other_receiver_total + $9,
           updated_at = now()
         WHERE station_id = $1 AND feed_id = $2`,
        [stationId, feedId, ...shown, newLines, newOthers],
      );
      await publish(manager, stationId, { type: 'feed', feedId });
    });
    lines -= newLines;
    others -= newOthers;
    written = JSON.stringify([...shown, 0, 0]);
  }

  function tick(): void {
    writing ??= write(state())
      .catch((error: unknown) =>
        logger.warn({ err: error, feed: feedId }, 'the health of a feed could not be stored'),
      )
      .finally(() => {
        writing = null;
      });
  }

  return {
    async start() {
      await dataSource.query(
        `INSERT INTO feed_health (station_id, feed_id, state)
         SELECT station_id, id, 'connecting' FROM feed WHERE station_id = $1 AND id = $2
         ON CONFLICT (station_id, feed_id) DO NOTHING`,
        [stationId, feedId],
      );
      timer = setInterval(tick, writeEveryMs);
    },
    line(arrivedAtMs) {
      lines += 1;
      lastLineMs = performance.now();
      lastLineAt = new Date(arrivedAtMs);
      const second = Math.floor(lastLineMs / bucketMs);
      const slot = second % buckets;
      if (secondOf[slot] !== second) {
        secondOf[slot] = second;
        perSecond[slot] = 0;
      }
      perSecond[slot]! += 1;
    },
    otherReceiver() {
      others += 1;
    },
    connection(next, error) {
      link = next;
      if (next === 'connected') {
        connectedAt = new Date();
        connectedAtMs = performance.now();
        lastLineMs = 0;
        linkError = null;
      }
      if (error !== null) linkError = error;
    },
    trouble(sentence) {
      troubleSentence = sentence;
    },
    async stop() {
      if (timer !== null) clearInterval(timer);
      await writing;
      await write('off').catch((error: unknown) =>
        logger.warn({ err: error, feed: feedId }, 'the health of a feed could not be stored'),
      );
    },
  };
}
