/**
 * A season of the demo station in a throw-away cluster: units made anew, a night, and how long an analyst
 * waits for an answer. Run: npx tsx tests/bench/season.bench.ts [nights=60]
 *
 * Prints times and ratios of the same run (machines are noisy, ratios less so); asserts nothing.
 */
import { spawnSync } from 'node:child_process';
import { once } from 'node:events';
import { createServer } from 'node:http';
import type { AddressInfo } from 'node:net';
import { createApp } from '../../server/app.ts';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { inTransaction } from '../../server/database/transaction.ts';
import { migrate } from '../../server/database/migrate.ts';
import { demoAccounts } from '../../server/platform/demo-accounts.ts';
import { openThrowAwayCluster } from '../../server/launch/cluster.mjs';
import { createRateLimits } from '../../server/middleware/rate-limit.ts';
import { readConfig } from '../../server/platform/config.ts';
import { createEventHub } from '../../server/platform/event-hub.ts';
import { createThreadPool } from '../../server/platform/heavy-work.ts';
import { createLogger } from '../../server/platform/logger.ts';
import { createMailer } from '../../server/platform/mailer.ts';
import { STANDING_RULES } from '../../shared/pairing/index.ts';
import { nightIndexOfDate } from '../../shared/radio/night.ts';
import { loadDemo } from '../../worker/fake-feed/load-demo.ts';
import { lockNight, makeNight } from '../../worker/units/night-maker.ts';

const nights = Number(process.argv[2] ?? 60);
const asked = 60;

function print(label: string, value: string): void {
  console.log(`${label.padEnd(62)} ${value}`);
}
async function seconds(work: () => Promise<unknown>): Promise<number> {
  const from = performance.now();
  await work();
  return (performance.now() - from) / 1000;
}
const share = (sorted: number[], q: number) =>
  sorted[Math.min(sorted.length - 1, Math.floor(q * sorted.length))]!;

const cluster = await openThrowAwayCluster();
const databaseUrl = cluster.url('postgres', 'postgres');
const dataSource = await connectDataSource(createDataSource({ url: databaseUrl, poolSize: 6 }));
try {
  await migrate(dataSource);
  const nowMs = Date.now();
  let stationId = 0;
  const loading = await seconds(async () => {
    stationId = (await loadDemo(dataSource, { nowMs, nights })).stationId;
  });
  const [{ spots }] = (await dataSource.query('SELECT count(*)::int AS spots FROM spot')) as [
    { spots: number },
  ];
  await dataSource.query('VACUUM ANALYZE');
  print(
    `Demo of ${nights} nights: ${spots.toLocaleString('en')} spots simulated, stored, units made`,
    `${loading.toFixed(1)} s`,
  );

  // The yardstick: psql writing the same rows out, once, as text.
  const copy = `\\copy (SELECT heard_at, receiver_id, call_id, band_m, freq_100hz, snr_db FROM spot) TO '/dev/null'`;
  const yardstick = await seconds(async () => {
    const psql = spawnSync('psql', [databaseUrl, '-qc', copy], { encoding: 'utf8' });
    if (psql.status !== 0) throw new Error(psql.stderr);
  });
  print('psql \\copy of the same rows to /dev/null', `${yardstick.toFixed(1)} s`);

  const station = { id: stationId, longitudeDeg: -9 };
  const rows: { night: string; spots: number }[] = await dataSource.query(
    'SELECT night, spots FROM unit_night WHERE station_id = $1 ORDER BY spots',
    [stationId],
  );
  const make = (night: string, blockMinutes: number) =>
    inTransaction(dataSource, async (manager) => {
      const index = nightIndexOfDate(night);
      await lockNight(manager, stationId, index);
      await makeNight(manager, station, index, { ...STANDING_RULES, blockMinutes }, nowMs);
    });
  const busiest = rows.at(-1)!;
  const one = await seconds(() => make(busiest.night, 20));
  print(
    `Units of one night (${busiest.spots.toLocaleString('en')} spots) under other rules`,
    `${(one * 1000).toFixed(0)} ms`,
  );
  const season = await seconds(async () => {
    for (const { night } of rows) await make(night, 30);
  });
  print(
    `Units of the season under other rules (all antenna pairs)`,
    `${season.toFixed(1)} s, ${(season / yardstick).toFixed(2)} x the yardstick, ${((season / spots) * 1e7).toFixed(1)} s per 10 million`,
  );

  const logger = createLogger('bench', 'silent');
  const config = readConfig({
    DATABASE_URL: databaseUrl,
    JWT_SECRET: 'for the bench only, thirty-two characters',
    DEMO: '1',
    LOG_LEVEL: 'silent',
  });
  process.env.NODE_ENV = 'production';
  const app = createApp({
    ...{ config, logger, dataSource, demoMailbox: null, now: Date.now },
    mailer: createMailer({ url: '', from: '', logger }),
    eventHub: createEventHub({ url: databaseUrl, logger }),
    rateLimits: createRateLimits(dataSource),
    heavyWork: createThreadPool({
      file: new URL('../../server/threads/thread.ts', import.meta.url),
      execArgv: ['--import', 'tsx'],
    }),
  });
  const server = createServer(app).listen(0, '127.0.0.1');
  await once(server, 'listening');
  const base = `http://127.0.0.1:${(server.address() as AddressInfo).port}/api`;
  const account = demoAccounts.find(({ role }) => role === 'analyst')!;
  const post = async (path: string, body: object, token = '') =>
    (
      await fetch(base + path, {
        method: 'POST',
        headers: { 'content-type': 'application/json', authorization: `Bearer ${token}` },
        body: JSON.stringify(body),
      })
    ).json() as Promise<never>;
  const { accessToken }: { accessToken: string } = await post('/auth/sign-in', account);
  const antennas: { id: number }[] = await dataSource.query('SELECT id FROM antenna WHERE station_id = $1', [
    stationId,
  ]);
  const times: number[] = [];
  let units = 0;
  for (let k = 0; k < asked; k++) {
    const antennaA = antennas[k % antennas.length]!.id;
    const antennaB = antennas[(k + 1 + (k % (antennas.length - 1))) % antennas.length]!.id;
    if (antennaA === antennaB) continue;
    const question = { antennaA, antennaB, bandsMetres: [[], [160], [80], [40]][k % 4] };
    const from = performance.now();
    const answer: { counts: { units: number } } = await post(
      `/stations/${stationId}/comparisons`,
      question,
      accessToken,
    );
    times.push(performance.now() - from);
    units += answer.counts.units;
  }
  times.sort((a, b) => a - b);
  print(
    `Comparison over HTTP, all panels, ${times.length} questions, ${Math.round(units / times.length).toLocaleString('en')} units on average`,
    `p50 ${share(times, 0.5).toFixed(0)} ms, p95 ${share(times, 0.95).toFixed(0)} ms`,
  );
  print('Comparison p50 over the yardstick', `${(share(times, 0.5) / 1000 / yardstick).toFixed(3)} x`);
  server.closeAllConnections();
  server.close();
} finally {
  await dataSource.destroy();
  await cluster.stop();
}
