import { chmodSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { DataSource } from 'typeorm';
import { afterAll, afterEach, beforeAll, describe, expect, it, vi } from 'vitest';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { migrate } from '../../server/database/migrate.ts';
import { openStationCluster } from '../../server/launch/cluster.mjs';
import { startLineServer, type LineServer } from '../../worker/fake-feed/line-server.ts';
import {
  insertFeedStation,
  lineKeys,
  readHealth,
  spotLine,
  storedKeys,
  type FeedStation,
} from '../helpers/feed.ts';
import { startWorker, type WorkerProcess } from '../helpers/worker-process.ts';

/**
 * A cluster of its own with all its durability, because it is killed here: the way a database behaves that
 * lost its power, not one that is asked to stop.
 */
let folder: string;
let cluster: Awaited<ReturnType<typeof openStationCluster>>;
let dataSource: DataSource;
let worker: WorkerProcess | null = null;
let server: LineServer;

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'whichwire-crash-'));
  chmodSync(folder, 0o755);
  cluster = await openStationCluster({ home: join(folder, 'postgres'), say: () => undefined });
  await cluster.ensureDatabase('crash');
  dataSource = await connectDataSource(createDataSource({ url: cluster.url('crash') }));
  await migrate(dataSource);
}, 120_000);
afterAll(async () => {
  await dataSource.destroy();
  await cluster.stop();
  rmSync(folder, { recursive: true, force: true });
});
afterEach(async () => {
  await worker?.end('SIGKILL');
  worker = null;
  await server.close();
  await dataSource.query('UPDATE feed SET enabled = false');
});

async function startFeed(): Promise<FeedStation> {
  // What a feed keeps for those that call again is longer than any of the interruptions here.
  server = await startLineServer({ port: 0, replayLines: 20_000, splitWrites: true });
  const station = await insertFeedStation(dataSource, server.port);
  worker = await startWorker(cluster.url('crash'));
  await server.waitForLogins(1);
  return station;
}

async function stored({ stationId }: FeedStation): Promise<number> {
  const rows: { n: number }[] = await dataSource.query(
    'SELECT count(*) AS n FROM spot WHERE station_id = $1',
    [stationId],
  );
  return rows[0]!.n;
}

const until = (check: () => Promise<void>) => vi.waitFor(check, { timeout: 60_000, interval: 100 });

const untilStored = (station: FeedStation, atLeast: number) =>
  until(async () => expect(await stored(station)).toBeGreaterThanOrEqual(atLeast));

/** Sends in the background until `finish` is called, which resolves with all that was sent. */
function speakSteadily(linesPerSecond: number): { finish: () => Promise<string[]> } {
  const lines: string[] = [];
  let enough = false;
  function* speak(): Generator<string> {
    for (let n = 0; !enough; n++) {
      // Written when it is its turn: a line carries the minute in which it is spoken.
      const line = spotLine(n, n % 3 === 0 ? 'EI7QSC' : 'EI7QSA');
      lines.push(line);
      yield line;
    }
  }
  const spoken = server.burst(speak(), linesPerSecond);
  return {
    async finish() {
      enough = true;
      await spoken;
      return lines;
    },
  };
}

async function expectExactlyOnce(station: FeedStation, lines: readonly string[]): Promise<void> {
  await untilStored(station, lines.length);
  expect(await storedKeys(dataSource, station.stationId)).toEqual(lineKeys(lines));
  // Counted in the same transactions, so exactly too.
  expect((await readHealth(dataSource, station.feedId))!.stored_total).toBe(lines.length);
}

describe('live ingest', { timeout: 180_000 }, () => {
  it('stores every line exactly once though the worker is killed twice in the middle', async () => {
    const station = await startFeed();
    const speech = speakSteadily(400);
    for (const share of [600, 2_000]) {
      await untilStored(station, share);
      await worker!.end('SIGKILL');
      worker = await startWorker(cluster.url('crash'));
    }
    await untilStored(station, 3_000);
    await expectExactlyOnce(station, await speech.finish());
  });

  it('stores every line exactly once though the database is killed twice in the middle', async () => {
    const station = await startFeed();
    const speech = speakSteadily(400);
    for (const share of [600, 2_000]) {
      await untilStored(station, share);
      const { pid } = cluster;
      // An immediate shutdown: nothing is written, the next start recovers from the log.
      process.kill(pid, 'SIGQUIT');
      await until(async () => expect(cluster.pid).not.toBe(pid));
    }
    await untilStored(station, 3_000);
    await expectExactlyOnce(station, await speech.finish());
    // The feed was read on all the while: the lines waited in the worker.
    expect(server.logins()).toHaveLength(1);
  });

  it('stores what it has read before it ends when it is asked to end', async () => {
    const station = await startFeed();
    const lines = Array.from({ length: 1_000 }, (_, n) => spotLine(n));
    for (const line of lines) server.send(line);
    await untilStored(station, 1);
    await until(async () =>
      expect((await readHealth(dataSource, station.feedId))!.lines_total).toBeGreaterThan(0),
    );
    expect(await worker!.end('SIGTERM')).toBe(0);
    worker = null;
    const { lines_total, stored_total, state } = (await readHealth(dataSource, station.feedId))!;
    expect(state).toBe('off');
    // All lines but the greeting, the prompt and the welcome.
    expect(lines_total - 3).toBe(stored_total);
    expect(await stored(station)).toBe(stored_total);
    // What it had not read yet is sent again to the next one.
    worker = await startWorker(cluster.url('crash'));
    await expectExactlyOnce(station, lines);
  });
});
