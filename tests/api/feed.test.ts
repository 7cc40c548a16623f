import type { DataSource } from 'typeorm';
import pg from 'pg';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, it, vi } from 'vitest';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { Dwell } from '../../server/database/entities/dwell.ts';
import { Feed } from '../../server/database/entities/feed.ts';
import { Receiver } from '../../server/database/entities/receiver.ts';
import { createLogger } from '../../server/platform/logger.ts';
import { eventChannel, notification, type StationEvent } from '../../shared/contracts/event.ts';
import { startLineServer, type LineServer } from '../../worker/fake-feed/line-server.ts';
import { createFeedSupervisor, type FeedSupervisor } from '../../worker/feed/feed-supervisor.ts';
import { createLivePairs } from '../../worker/feed/live-pairs.ts';
import { createTestDatabase, type TestDatabase } from '../helpers/database.ts';
import {
  insertFeedStation,
  lineKeys,
  readHealth,
  spotLine,
  storedKeys,
  type FeedStation,
} from '../helpers/feed.ts';

const logger = createLogger('test', process.env.TEST_LOG_LEVEL ?? 'silent');

let database: TestDatabase;
let dataSource: DataSource;
let server: LineServer;
let station: FeedStation;
let supervisors: FeedSupervisor[] = [];

beforeAll(async () => {
  database = await createTestDatabase();
  dataSource = await connectDataSource(createDataSource({ url: database.url }));
});
afterAll(async () => {
  await dataSource.destroy();
  await database.drop();
});
beforeEach(async () => {
  server = await startLineServer({ port: 0 });
  station = await insertFeedStation(dataSource, server.port);
});
afterEach(async () => {
  await Promise.all(supervisors.map((supervisor) => supervisor.stop(2_000)));
  supervisors = [];
  await server.close();
  // The feeds of one test must not be read by the next.
  await dataSource.query('UPDATE feed SET enabled = false');
});

function supervise(change: Partial<Parameters<typeof createFeedSupervisor>[0]> = {}): FeedSupervisor {
  const supervisor = createFeedSupervisor({
    dataSource,
    databaseUrl: database.url,
    logger,
    onStored: () => undefined,
    connection: { idleTimeoutMs: 60_000, retryMs: 50, longestRetryMs: 200 },
    health: { writeEveryMs: 100 },
    pollSeconds: 0.2,
    ...change,
  });
  supervisors.push(supervisor);
  supervisor.start();
  return supervisor;
}

const lines = (from: number, to: number, receiver?: string): string[] =>
  Array.from({ length: to - from }, (_, i) => spotLine(from + i, receiver));

const sendAll = (list: readonly string[]): void => {
  for (const line of list) server.send(line);
};

const health = () => readHealth(dataSource, station.feedId);

async function untilStored(count: number): Promise<void> {
  await vi.waitFor(async () => expect(await storedKeys(dataSource, station.stationId)).toHaveLength(count), {
    timeout: 20_000,
    interval: 100,
  });
}

async function untilHealth(wanted: object): Promise<void> {
  await vi.waitFor(async () => expect(await health()).toMatchObject(wanted), {
    timeout: 20_000,
    interval: 100,
  });
}

describe('a live feed', () => {
  it('is stored line by line through writes cut anywhere, with rubbish between, and counted', async () => {
    server.setFaults({ splitWrites: true, garbageEveryLines: 10 });
    supervise();
    await server.waitForLogins(1);
    expect(server.logins()).toEqual(['EI7QSB']);
    const ours = [...lines(0, 600), ...lines(0, 300, 'EI7QSC')];
    const others = lines(0, 100, 'W1QUU');
    sendAll([...ours.slice(0, 500), ...others, ...ours.slice(500)]);
    await untilStored(900);
    expect(await storedKeys(dataSource, station.stationId)).toEqual(lineKeys(ours));
    // After each tenth of 1,000 lines one of rubbish, of which some are spots that cannot be read.
    await untilHealth({ state: 'receiving', stored_total: 900, doubled_total: 0, other_receiver_total: 100 });
    const { lines_total, refused_total } = (await health())!;
    const refusals: { reason: string; raw: string }[] = await dataSource.query(
      'SELECT reason, raw FROM feed_refusal WHERE feed_id = $1',
      [station.feedId],
    );
    expect(refusals).toHaveLength(refused_total);
    expect(refused_total).toBeGreaterThan(10);
    expect(new Set(refusals.map(({ raw }) => raw.slice(0, 5)))).toEqual(new Set(['DX de']));
    expect(refusals.every(({ reason }) => reason.endsWith('.'))).toBe(true);
    expect(lines_total).toBeGreaterThanOrEqual(900 + 100 + refused_total);
  });

  it('sends its latest lines again after each lost connection and every spot is stored once', async () => {
    server.setFaults({ dropAfterLines: 60, replayLines: 40 });
    supervise();
    await server.waitForLogins(1);
    const sent = lines(0, 60);
    sendAll(sent);
    for (let call = 2; call <= 5; call++) {
      // 40 lines come again at the log-in, so that 20 new ones end the connection.
      await server.waitForLogins(call);
      const next = lines(call * 100, call * 100 + 20);
      sent.push(...next);
      sendAll(next);
    }
    await server.waitForLogins(6);
    await untilStored(sent.length);
    expect(await storedKeys(dataSource, station.stationId)).toEqual(lineKeys(sent));
    await untilHealth({ stored_total: 140, doubled_total: 5 * 40 });
  });

  it('is left and called again when it falls silent without closing', async () => {
    server.setFaults({ halfOpenAfterLines: 20, replayLines: 15 });
    supervise({ connection: { idleTimeoutMs: 400, retryMs: 50 } });
    await server.waitForLogins(1);
    const sent = lines(0, 20);
    sendAll(sent);
    await server.waitForLogins(2);
    server.setFaults({ halfOpenAfterLines: undefined });
    const more = lines(20, 40);
    await vi.waitFor(() => expect(server.clientCount()).toBe(1), { timeout: 10_000 });
    sendAll(more);
    await untilStored(40);
    expect(await storedKeys(dataSource, station.stationId)).toEqual(lineKeys([...sent, ...more]));
  });

  it('is called again with a sentence in its health while nobody answers', async () => {
    const { port } = server;
    await server.close();
    supervise();
    await untilHealth({ last_error: `Nobody answers at 127.0.0.1:${port}.` });
    server = await startLineServer({ port });
    await server.waitForLogins(1);
    sendAll(lines(0, 3));
    await untilHealth({ state: 'receiving', last_error: null, stored_total: 3 });
  });

  it("is stamped with the feed's minute when the line comes late", async () => {
    supervise();
    await server.waitForLogins(1);
    const lateMs = Math.floor(Date.now() / 60_000) * 60_000 - 10 * 60_000;
    server.send(spotLine(1, 'EI7QSA', lateMs));
    server.send(spotLine(2, 'EI7QSA'));
    await untilStored(2);
    const rows: { heard_at: Date; uncertainty_s: number }[] = await dataSource.query(
      'SELECT heard_at, uncertainty_s FROM spot WHERE station_id = $1 ORDER BY heard_at',
      [station.stationId],
    );
    expect(rows[0]).toEqual({ heard_at: new Date(lateMs), uncertainty_s: 60 });
    expect(rows[1]!.uncertainty_s).toBe(0);
  });

  it('refuses a line without end and reads the next one', async () => {
    supervise();
    await server.waitForLogins(1);
    server.send(`DX de EI7QSA-#: ${'9'.repeat(5_000)}`);
    server.send(spotLine(1));
    await untilStored(1);
    await untilHealth({ refused_total: 1 });
  });

  it('keeps the newest 10,000 refusals', async () => {
    await dataSource.query(
      `INSERT INTO feed_refusal (station_id, feed_id, received_at, reason, raw)
       SELECT $1, $2, now(), 'An old one.', n::text FROM generate_series(1, 10500) n`,
      [station.stationId, station.feedId],
    );
    supervise();
    await server.waitForLogins(1);
    sendAll(Array.from({ length: 20 }, (_, i) => `DX de EI7QSA-#: ${i}.0.0`));
    await untilHealth({ refused_total: 20 });
    const rows: { n: number; news: number; oldest: number }[] = await dataSource.query(
      `SELECT count(*) AS n, count(*) FILTER (WHERE raw LIKE 'DX%') AS news,
         min(raw::integer) FILTER (WHERE raw NOT LIKE 'DX%') AS oldest
       FROM feed_refusal WHERE feed_id = $1`,
      [station.feedId],
    );
    expect(rows[0]).toEqual({ n: 10_000, news: 20, oldest: 521 });
  });
});

describe('the feed supervisor', () => {
  it('lets one of two workers read a feed and the other take over when the first stops', async () => {
    const first = supervise();
    await server.waitForLogins(1);
    supervise();
    sendAll(lines(0, 50));
    await untilStored(50);
    expect(server.logins()).toHaveLength(1);
    await first.stop(2_000);
    supervisors = supervisors.filter((one) => one !== first);
    await server.waitForLogins(2);
    sendAll(lines(50, 100));
    await untilStored(100);
    expect(server.clientCount()).toBe(1);
  });

  it('reads on when its claims are lost with their connection, and never twice at last', async () => {
    supervise();
    await server.waitForLogins(1);
    supervise();
    await dataSource.query(
      `SELECT pg_terminate_backend(pid) FROM pg_stat_activity
       WHERE datname = current_database() AND application_name = 'whichwire feed claims'`,
    );
    sendAll(lines(0, 100));
    await untilStored(100);
    await vi.waitFor(() => expect(server.clientCount()).toBe(1), { timeout: 10_000 });
    const held: { n: number }[] = await dataSource.query(
      `SELECT count(*) AS n FROM pg_locks WHERE locktype = 'advisory' AND objid = $1 AND objsubid = 2 AND granted
         AND database = (SELECT oid FROM pg_database WHERE datname = current_database())`,
      [station.feedId],
    );
    expect(held[0]!.n).toBe(1);
  });

  it('follows what people change: off, on, another port, removed', async () => {
    const feeds = dataSource.getRepository(Feed);
    const which = { stationId: station.stationId, id: station.feedId };
    supervise();
    await server.waitForLogins(1);
    await feeds.update(which, { enabled: false });
    await server.waitForNoClients();
    await untilHealth({ state: 'off' });
    await feeds.update(which, { enabled: true });
    await server.waitForLogins(2);
    const elsewhere = await startLineServer({ port: 0 });
    await feeds.update(which, { port: elsewhere.port });
    await elsewhere.waitForLogins(1);
    await server.waitForNoClients();
    await feeds.delete(which);
    await elsewhere.waitForNoClients();
    await elsewhere.close();
  });

  it('learns of a new receiver without a new connection', async () => {
    supervise();
    await server.waitForLogins(1);
    server.send(spotLine(1, 'EI7QSD'));
    await untilHealth({ other_receiver_total: 1 });
    await dataSource
      .getRepository(Receiver)
      .save({ stationId: station.stationId, callSign: 'EI7QSD', label: 'Barn' });
    await vi.waitFor(
      async () => {
        server.send(spotLine(2, 'EI7QSD'));
        expect(await storedKeys(dataSource, station.stationId)).toHaveLength(1);
      },
      { timeout: 10_000, interval: 200 },
    );
    expect(server.logins()).toHaveLength(1);
  });

  it('stores what it has read when it stops', async () => {
    const supervisor = supervise();
    await server.waitForLogins(1);
    sendAll(lines(0, 300));
    await untilHealth({ lines_total: expect.any(Number), state: 'receiving' });
    await supervisor.stop(5_000);
    supervisors = [];
    const { lines_total } = (await health())!;
    // Every line that was read and counted is stored, but for the greeting, the prompt and the welcome.
    expect(await storedKeys(dataSource, station.stationId)).toHaveLength(lines_total - 3);
    await untilHealth({ state: 'off' });
  });
});

describe('live pairs', () => {
  it('are told to the browsers when two receivers on two antennas hear a station together', async () => {
    const { stationId, receivers, antennaIds } = station;
    const startsAt = new Date(Date.now() - 3_600_000);
    for (const [i, receiverId] of [receivers.EI7QSA, receivers.EI7QSC].entries()) {
      // EI7QSA is on the antenna with the higher id.
      const antennaId = antennaIds[1 - i]!;
      await dataSource
        .getRepository(Dwell)
        .save({ stationId, receiverId, antennaId, startsAt, source: 'hand' });
    }
    const events: StationEvent[] = [];
    const listener = new pg.Client(database.url);
    await listener.connect();
    listener.on('notification', ({ payload }) => {
      const message = notification.parse(JSON.parse(payload!));
      if (message.stationId === stationId) events.push(message.event);
    });
    await listener.query(`LISTEN ${eventChannel}`);
    const livePairs = createLivePairs(dataSource, logger);
    supervise({ onStored: livePairs.add });
    await server.waitForLogins(1);
    server.send(spotLine(21, 'EI7QSA'));
    server.send(spotLine(21, 'EI7QSC').replace('21 dB', '15 dB'));
    server.send(spotLine(33, 'EI7QSA'));
    const pairs = await vi.waitFor(
      () => {
        const event = events.find(({ type }) => type === 'pairs');
        if (event?.type !== 'pairs') throw new Error('No pairs yet.');
        return event.pairs;
      },
      { timeout: 10_000 },
    );
    await livePairs.stop();
    await listener.end();
    expect(pairs).toHaveLength(1);
    expect(pairs[0]).toMatchObject({
      call: 'W1QRB',
      bandMetres: 160,
      country: 'United States',
      antennaA: antennaIds[0],
      antennaB: antennaIds[1],
      receiverA: receivers.EI7QSC,
      receiverB: receivers.EI7QSA,
      snrADb: 15,
      snrBDb: 21,
      differenceDb: -6,
    });
    expect(events.some(({ type }) => type === 'spots')).toBe(true);
  });
});
