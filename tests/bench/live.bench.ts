/**
 * The live feed at full rate: a line server sends spots to the built worker, which stores them.
 * Run after `npm run build`: npx tsx tests/bench/live.bench.ts [lines a second=5000] [seconds=60]
 *
 * Prints lines sent, spots stored, the worker's memory and processor time; asserts nothing.
 */
import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { readFileSync } from 'node:fs';
import { createInterface } from 'node:readline';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { migrate } from '../../server/database/migrate.ts';
import { openThrowAwayCluster } from '../../server/launch/cluster.mjs';
import { formatSpotLine } from '../../worker/fake-feed/spot-line.ts';
import { startLineServer } from '../../worker/fake-feed/line-server.ts';
import { insertStation } from '../helpers/station-rows.ts';

const rate = Number(process.argv[2] ?? 5000);
const forSeconds = Number(process.argv[3] ?? 60);
const clockTicksPerSecond = 100;

const letters = 'ABCDEFGHIJKLMNOPQRSTUVWXYZ';
/** Calls with a demo suffix (QRA to QUZ): 26,000 different ones, so that hardly any line repeats another. */
function callOf(n: number): string {
  const third = letters[n % 26]!;
  const second = 'RSTU'[Math.floor(n / 26) % 4]!;
  const digit = Math.floor(n / 104) % 10;
  const prefix = ['EA', 'DL', 'SM', 'OK', 'SP', 'LZ', 'YO', 'HA', 'OH', 'LA'][Math.floor(n / 1040) % 10]!;
  return `${prefix}${digit}Q${second}${third}`;
}

function* spotLines(count: number): Generator<string> {
  for (let n = 0; n < count; n++) {
    yield formatSpotLine({
      receiver: 'EI7QSB',
      // Every line another frequency for its call, so that none is a double.
      freqKhz: 1810 + (Math.floor(n / 10_400) % 300) / 10 + (n % 7) * 3,
      call: callOf(n),
      mode: 'CW',
      snrDb: 5 + (n % 30),
      speedWpm: 18 + (n % 15),
      kind: 'CQ',
      timeMs: Date.now(),
    });
  }
}

function usage(pid: number) {
  const stat = readFileSync(`/proc/${pid}/stat`, 'utf8').split(') ')[1]!.split(' ');
  const rss = /VmRSS:\s+(\d+)/.exec(readFileSync(`/proc/${pid}/status`, 'utf8'))![1];
  return { seconds: (Number(stat[11]) + Number(stat[12])) / clockTicksPerSecond, mb: Number(rss) / 1024 };
}

const cluster = await openThrowAwayCluster();
const url = cluster.url('postgres', 'postgres');
const dataSource = await connectDataSource(createDataSource({ url, poolSize: 2 }));
await migrate(dataSource);
const { stationId } = await insertStation(dataSource);
const feed = await startLineServer({ port: 0 });
await dataSource.query(
  `INSERT INTO feed (station_id, name, host, port, login_call) VALUES ($1, 'bench', '127.0.0.1', $2, 'EI7QSB')`,
  [stationId, feed.port],
);
const worker = spawn(process.execPath, ['dist/worker.js'], {
  env: {
    ...process.env,
    NODE_ENV: 'production',
    DATABASE_URL: url,
    JWT_SECRET: 'for the bench only, thirty-two characters',
  },
  stdio: ['ignore', 'pipe', 'inherit'],
});
createInterface({ input: worker.stdout });
await feed.waitForLogins(1);

const count = rate * forSeconds;
const before = usage(worker.pid!);
let highestMb = before.mb;
const watch = setInterval(() => (highestMb = Math.max(highestMb, usage(worker.pid!).mb)), 500);
const startedMs = performance.now();
await feed.burst(spotLines(count), rate);
const sentIn = (performance.now() - startedMs) / 1000;
const stored = async () =>
  ((await dataSource.query('SELECT count(*)::int AS n FROM spot')) as [{ n: number }])[0].n;
let n = await stored();
for (let still = 0; n < count && still < 20;) {
  await new Promise((resolve) => setTimeout(resolve, 500));
  const now = await stored();
  still = now === n ? still + 1 : 0;
  n = now;
}
const caughtUp = (performance.now() - startedMs) / 1000;
clearInterval(watch);
const after = usage(worker.pid!);
console.log(
  `Lines sent       ${count.toLocaleString('en')} in ${sentIn.toFixed(1)} s (${Math.round(count / sentIn).toLocaleString('en')} a second)`,
);
console.log(
  `Spots stored     ${n.toLocaleString('en')} (${(n / count).toFixed(4)} of the lines), the last ${(caughtUp - sentIn).toFixed(1)} s after the last line`,
);
console.log(
  `Worker           ${((after.seconds - before.seconds) / caughtUp).toFixed(2)} of one core, memory ${before.mb.toFixed(0)} MB before, ${highestMb.toFixed(0)} MB at most, ${after.mb.toFixed(0)} MB after`,
);
worker.kill('SIGTERM');
await once(worker, 'exit');
await feed.close();
await dataSource.destroy();
await cluster.stop();
