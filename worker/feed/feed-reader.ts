import type { DataSource } from 'typeorm';
import type { Logger } from '../../server/platform/logger.ts';
import { classifyFailure } from '../platform/database-failure.ts';
import type { SpotRecord } from '../spots/spot-record.ts';
import { writeSpots } from '../spots/spot-writer.ts';
import { createBuffer } from './buffer.ts';
import { stampArrival } from './feed-clock.ts';
import { createFeedConnection, type FeedConnectionOptions } from './feed-connection.ts';
import { createFeedHealth, type FeedHealthOptions } from './feed-health.ts';
import { createRefusalKeeper } from './feed-refusals.ts';
import { longestLineBytes, type SplitLine } from './line-splitter.ts';
import type { ReceiverNames } from './receiver-names.ts';
import { createSpotLineParser } from './spot-line.ts';

export interface FeedRow {
  stationId: number;
  feedId: number;
  host: string;
  port: number;
  loginCall: string;
}

export interface FeedReaderOptions {
  dataSource: DataSource;
  logger: Logger;
  feed: FeedRow;
  receivers: ReceiverNames;
  /** Told after each commit with the batch's spots, doubles among them. */
  onStored: (stationId: number, spots: readonly SpotRecord[]) => void;
  connection?: Pick<
    FeedConnectionOptions,
    'idleTimeoutMs' | 'retryMs' | 'longestRetryMs' | 'connectTimeoutMs'
  >;
  health?: Pick<FeedHealthOptions, 'silentAfterMs' | 'writeEveryMs'>;
}

export interface FeedReader {
  start(): Promise<void>;
  /** The station's receivers have changed. */
  setReceivers(receivers: ReceiverNames): void;
  /** Stops reading and stores what was read, until the deadline (`performance.now()` milliseconds). */
  stop(deadlineMs: number): Promise<void>;
}

type Item =
  | { kind: 'spot'; spot: SpotRecord; raw: string; receivedAtMs: number }
  | { kind: 'refusal'; reason: string; raw: string; receivedAtMs: number };

/** One live feed from its socket to the database: bytes, lines, spots or refusals, buffer, writer. */
export function createFeedReader(options: FeedReaderOptions): FeedReader {
  const { dataSource, feed, onStored } = options;
  const { stationId, feedId } = feed;
  const logger = options.logger.child({ station: stationId, feed: feedId });
  let receivers = options.receivers;
  const parse = createSpotLineParser();
  const keepRefusals = createRefusalKeeper(stationId, feedId);
  const health = createFeedHealth({ dataSource, logger, stationId, feedId, ...options.health });

  const buffer = createBuffer<Item>({
    write,
    classify: classifyFailure,
    onFull: () => {
      health.trouble('Lines come faster than they can be stored: the feed is held back.');
      connection.pause();
    },
    onRoom: () => {
      health.trouble(null);
      connection.resume();
    },
    onRetry: (error, pauseMs) => {
      health.trouble('The database does not take the spots; they are kept and tried again.');
      logger.warn({ err: error, pauseMs, waiting: buffer.size() }, 'spots could not be stored; trying again');
    },
    onRefused: (item, error) => {
      logger.error({ err: error, line: item.raw }, 'a line could not be stored');
      // A refusal that cannot be stored is the end of it: it is in the log.
      if (item.kind === 'refusal') return;
      const reason = `The database refused this line: ${error instanceof Error ? error.message : String(error)}`;
      buffer.add({ kind: 'refusal', reason, raw: item.raw, receivedAtMs: item.receivedAtMs });
    },
  });

  async function write(items: readonly Item[]): Promise<void> {
    const spots: SpotRecord[] = [];
    const refusals: Extract<Item, { kind: 'refusal' }>[] = [];
    for (const item of items) {
      if (item.kind === 'spot') spots.push(item.spot);
      else refusals.push(item);
    }
    await writeSpots(dataSource, {
      stationId,
      importId: 0,
      spots,
      alongside: async (manager, { stored, doubled }) => {
        await keepRefusals(manager, refusals);
        await manager.query(
          `UPDATE feed_health SET stored_total = stored_total + $3, doubled_total = doubled_total + $4,
             refused_total = refused_total + $5
           WHERE station_id = $1 AND feed_id = $2`,
          [stationId, feedId, stored, doubled, refusals.length],
        );
      },
    });
    health.trouble(null);
    if (spots.length > 0) onStored(stationId, spots);
  }

  /** True for a line of any receiver: the feed serves us. */
  function takeLine({ text, cut }: SplitLine, receivedAtMs: number): boolean {
    if (text.trim() === '') return false;
    health.line(receivedAtMs);
    const refuse = (reason: string): void => buffer.add({ kind: 'refusal', reason, raw: text, receivedAtMs });
    if (cut) {
      refuse(`The line is longer than ${longestLineBytes} bytes.`);
      return false;
    }
    const line = parse(text);
    if (line.kind === 'other') return false;
    const receiverId = line.receiver === null ? null : receivers.find(line.receiver);
    if (line.receiver !== null && receiverId === null) {
      health.otherReceiver();
      return true;
    }
    if (line.kind === 'refused' || receiverId === null) {
      refuse(line.kind === 'refused' ? line.reason : 'The line names no receiver.');
      return false;
    }
    const { call, freq100Hz, bandMetres, mode, snrDb, speedWpm, minute } = line;
    buffer.add({
      kind: 'spot',
      raw: text,
      receivedAtMs,
      spot: {
        ...stampArrival(receivedAtMs, minute),
        ...{ receiverId, call, freq100Hz, bandMetres, mode, snrDb, speedWpm },
        feedMinute: minute,
      },
    });
    return true;
  }

  const connection = createFeedConnection({
    host: feed.host,
    port: feed.port,
    loginCall: feed.loginCall,
    onLine: takeLine,
    onState: (state, error) => {
      health.connection(state, error);
      if (error !== null) logger.warn({ reason: error }, 'a feed was lost; calling again');
      else if (state === 'connected') logger.info('a feed is connected');
    },
    ...options.connection,
  });

  return {
    async start() {
      await health.start();
      connection.start();
    },
    setReceivers(next) {
      receivers = next;
    },
    async stop(deadlineMs) {
      connection.stop();
      const lost = await buffer.close(deadlineMs);
      if (lost > 0) logger.error({ lines: lost }, 'lines were read but could not be stored in time');
      await health.stop();
    },
  };
}
