import { once } from 'node:events';
import { createServer } from 'node:http';
import { createApp } from './app.ts';
import { connectDataSource, createDataSource } from './database/data-source.ts';
import { createRateLimits } from './middleware/rate-limit.ts';
import { readConfig } from './platform/config.ts';
import { startDemoMailbox } from './platform/demo-mailbox.ts';
import { createEventHub } from './platform/event-hub.ts';
import { createThreadPool } from './platform/heavy-work.ts';
import { createLogger } from './platform/logger.ts';
import { createMailer } from './platform/mailer.ts';
import { createShutdown } from './platform/shutdown.ts';

const config = readConfig(process.env);
const logger = createLogger('server', config.logLevel);
const shutdown = createShutdown(logger);
shutdown.listenForSignals();

const dataSource = createDataSource({
  url: config.databaseUrl,
  poolSize: config.databasePool,
  applicationName: 'whichwire server',
  statementTimeoutSeconds: 60,
  onPoolError: (error) => logger.warn({ err: error }, 'an idle database connection broke'),
});
await connectDataSource(dataSource, {
  waitSeconds: 60,
  onRetry: (error) => logger.info({ reason: error.message }, 'waiting for the database'),
});
shutdown.onStop('database', () => dataSource.destroy());

const demoMailbox = config.demo && !config.mailUrl ? await startDemoMailbox() : null;
if (demoMailbox) shutdown.onStop('demo mailbox', () => demoMailbox.close());
const mailer = createMailer({ url: demoMailbox?.url ?? config.mailUrl, from: config.mailFrom, logger });
shutdown.onStop('mail', () => mailer.drain());
const eventHub = createEventHub({ url: config.databaseUrl, logger });
await eventHub.start();
shutdown.onStop('events', () => eventHub.stop());

// Beside this file once it is built.
const heavyWork = createThreadPool({ file: new URL('./thread.js', import.meta.url) });
shutdown.onStop('threads', () => heavyWork.close());

const app = createApp({
  config,
  logger,
  dataSource,
  mailer,
  demoMailbox,
  eventHub,
  rateLimits: createRateLimits(dataSource),
  heavyWork,
  now: Date.now,
});
const server = createServer(app);
// Slow senders must not hold a connection for ever; a 200 MB upload on a slow line may take its time.
server.headersTimeout = 15_000;
server.requestTimeout = 30 * 60_000;
server.listen(config.port, config.host);
await once(server, 'listening');
shutdown.onStop('http', async () => {
  const closed = new Promise((resolve) => server.close(resolve));
  server.closeIdleConnections();
  // Event streams never end by themselves.
  setTimeout(() => server.closeAllConnections(), 3_000).unref();
  await closed;
});
const address = server.address();
logger.info({ port: typeof address === 'object' ? address?.port : config.port }, 'listening');
