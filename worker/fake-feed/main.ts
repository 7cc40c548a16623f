import { z } from 'zod';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { createLogger } from '../../server/platform/logger.ts';
import { createShutdown } from '../../server/platform/shutdown.ts';
import { readDemoWorld } from './demo-world.ts';
import { startLineServer } from './line-server.ts';
import { announceFeed, createLiveStation } from './live-station.ts';
import { createDemoScenario, demoFirstNight, demoSeed } from './scenario.ts';
import { createSimulator, type LiveOptions, type Simulator } from './simulator.ts';
import { formatSpotLine } from './spot-line.ts';

/**
 * The fake feed as a process: the demo station's receivers, live from now on, on a TCP port. With a
 * database it goes on with the world of the past nights there, works the switch and says where it listens;
 * without one it is only a feed.
 */
const environment = z.object({
  DATABASE_URL: z.string().min(1).optional(),
  FEED_HOST: z.string().default('127.0.0.1'),
  FEED_PORT: z.coerce.number().int().min(0).max(65535).default(7373),
  FEED_SPEED: z.coerce.number().positive().max(1000).default(1),
  DEMO_SEED: z.coerce.number().int().default(demoSeed),
  LOG_LEVEL: z.string().default('info'),
});

const tickMs = 250;
const switchTickMs = 1000;
/** The loader ended some seconds before this process began; the switches since are still to be logged. */
const handOverMs = 10 * 60_000;
const databaseWaitSeconds = 60;
/** After a longer pause (the computer slept) the feed goes on with the present instead of telling the past. */
const longestPauseMs = 60_000;

const parsed = environment.safeParse(process.env);
if (!parsed.success) {
  const sentences = parsed.error.issues.map((issue) => `${issue.path.join('.')}: ${issue.message}`);
  process.stderr.write(`The fake feed cannot start. ${sentences.join(' ')}\n`);
  process.exit(1);
}
const env = parsed.data;
const logger = createLogger('fake-feed', env.LOG_LEVEL);
const shutdown = createShutdown(logger, 2_000);
shutdown.listenForSignals();
const server = await startLineServer({ port: env.FEED_PORT, host: env.FEED_HOST });
shutdown.onStop('line server', () => server.close());

/** The world with its database: who switches there is heard here. */
async function joinDemoStation(
  url: string,
): Promise<{ simulator: Simulator; options: Pick<LiveOptions, 'antennaAt'> }> {
  const dataSource = createDataSource({
    url,
    poolSize: 2,
    applicationName: 'whichwire fake feed',
    statementTimeoutSeconds: 30,
  });
  await connectDataSource(dataSource, { waitSeconds: databaseWaitSeconds });
  shutdown.onStop('database', () => dataSource.destroy());
  const world = await readDemoWorld(dataSource.manager);
  if (world === null) throw new Error('This database has no demo station; load-demo makes it.');
  await announceFeed(dataSource, world, env.FEED_HOST, server.port);

  const station = createLiveStation(dataSource, world, Date.now() - handOverMs, logger);
  let working = station.work(Date.now());
  let busy = false;
  const timer = setInterval(() => {
    if (busy) return;
    busy = true;
    working = station.work(Date.now()).finally(() => (busy = false));
  }, switchTickMs);
  shutdown.onStop('switch', () => {
    clearInterval(timer);
    return working;
  });
  await working;
  return { simulator: world.simulator, options: { antennaAt: station.antennaAt } };
}

try {
  const { simulator, options } =
    env.DATABASE_URL === undefined
      ? {
          simulator: createSimulator({
            seed: env.DEMO_SEED,
            scenario: createDemoScenario(demoFirstNight(Date.now())),
          }),
          options: {},
        }
      : await joinDemoStation(env.DATABASE_URL);
  const goLive = (fromMs: number) => simulator.live({ fromMs, speed: env.FEED_SPEED, ...options });
  let atMs = Date.now();
  let live = goLive(atMs);
  const timer = setInterval(() => {
    const nowMs = Date.now();
    if (Math.abs(nowMs - atMs) > longestPauseMs) live = goLive(nowMs);
    atMs = nowMs;
    for (const spot of live.advance(nowMs)) server.send(formatSpotLine(spot));
  }, tickMs);
  shutdown.onStop('clock', () => clearInterval(timer));
  logger.info({ port: server.port, speed: env.FEED_SPEED }, 'listening');
} catch (error) {
  logger.fatal({ err: error }, 'the fake feed cannot start');
  await shutdown.stop('failed start');
  process.exitCode = 1;
}
