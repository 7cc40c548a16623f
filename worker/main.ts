import { connectDataSource, createDataSource } from '../server/database/data-source.ts';
import { createListener } from '../server/platform/listener.ts';
import { createLogger } from '../server/platform/logger.ts';
import { jobChannel } from '../server/platform/notify.ts';
import { createShutdown } from '../server/platform/shutdown.ts';
import { eventChannel, notification } from '../shared/contracts/event.ts';
import { runBearingsJob } from './bearings/bearings.job.ts';
import { createFeedSupervisor } from './feed/feed-supervisor.ts';
import { createLivePairs } from './feed/live-pairs.ts';
import { settleImports } from './imports/housekeeping.ts';
import { runImportUndoJob } from './imports/import-undo.job.ts';
import { runImportJob } from './imports/import.job.ts';
import { keepHouse } from './jobs/housekeeping.ts';
import { createJobRunner } from './jobs/job-runner.ts';
import { startTimedJobs } from './jobs/timed-jobs.ts';
import { readWorkerConfig } from './platform/config.ts';
import { createUnitMaker } from './units/unit-maker.ts';
import { runUnitsJob } from './units/units.job.ts';

/**
 * The second process: reads live feeds, runs jobs, keeps house. Any number of them work side by side over
 * one database, and each can be killed at any moment.
 */
const config = readWorkerConfig(process.env);
const logger = createLogger('worker', config.logLevel);
const shutdown = createShutdown(logger);
shutdown.listenForSignals();

/** Leaves the shutdown's ten seconds some room for what is stopped after the feeds. */
const feedsStopWithinMs = 6_000;

const dataSource = createDataSource({
  url: config.databaseUrl,
  poolSize: config.databasePool,
  applicationName: `whichwire worker`,
  onPoolError: (error) => logger.warn({ err: error }, 'an idle database connection broke'),
});
await connectDataSource(dataSource, {
  waitSeconds: 60,
  onRetry: (error) => logger.info({ reason: error.message }, 'waiting for the database'),
});
shutdown.onStop('database', () => dataSource.destroy());

const livePairs = createLivePairs(dataSource, logger);
shutdown.onStop('live pairs', () => livePairs.stop());

const feeds = createFeedSupervisor({
  dataSource,
  databaseUrl: config.databaseUrl,
  logger,
  onStored: (stationId, spots) => livePairs.add(stationId, spots),
  connection: { idleTimeoutMs: config.feedIdleSeconds * 1000, retryMs: config.feedRetrySeconds * 1000 },
});

const jobs = createJobRunner({
  dataSource,
  logger,
  workerName: config.workerName,
  concurrency: config.jobConcurrency,
  handlers: {
    bearings: runBearingsJob,
    import: runImportJob,
    'import-undo': runImportUndoJob,
    units: runUnitsJob,
  },
});
shutdown.onStop('jobs', () => jobs.stop());

const units = createUnitMaker({ dataSource, logger });
shutdown.onStop('units', () => units.stop());

const timedJobs = startTimedJobs({
  dataSource,
  logger,
  workerName: config.workerName,
  jobs: [
    {
      name: 'housekeeping',
      schedule: '17 * * * *',
      run: async () => logger.info({ cleared: await keepHouse(dataSource) }, 'housekeeping is done'),
    },
    {
      name: 'imports',
      schedule: '* * * * *',
      run: async () => {
        const { cleared, settled } = await settleImports(dataSource);
        if (cleared + settled > 0) logger.info({ cleared, settled }, 'imports are settled');
      },
    },
  ],
});
shutdown.onStop('timed jobs', () => timedJobs.stop());
// Of the workings the first to be stopped: jobs can go on elsewhere, lines that were read are only here.
shutdown.onStop('feeds', () => feeds.stop(feedsStopWithinMs));

const listener = createListener({
  url: config.databaseUrl,
  channels: [jobChannel, eventChannel],
  logger,
  onMessage: (channel, payload) => {
    if (channel === jobChannel) {
      jobs.wake();
      units.wake();
    } else if (changesFeeds(payload)) feeds.wake();
  },
  onConnected: () => {
    jobs.wake();
    units.wake();
    feeds.wake();
  },
});
await listener.start();
shutdown.onStop('listener', () => listener.stop());

feeds.start();
jobs.start();
units.start();
logger.info({ worker: config.workerName }, 'listening');

/** Only what a person changes: the events about spots and health are the worker's own. */
function changesFeeds(payload: string): boolean {
  if (!payload.includes('"station"')) return false;
  try {
    return notification.parse(JSON.parse(payload)).event.type === 'station';
  } catch {
    // A newer release may say things that this one does not know: looking once too often does no harm.
    return true;
  }
}
