import { z } from 'zod';
import { createLogger } from '../../server/platform/logger.ts';
import { createShutdown } from '../../server/platform/shutdown.ts';
import { startLineServer } from './line-server.ts';
import { createDemoScenario, demoFirstNight, demoSeed } from './scenario.ts';
import { createSimulator } from './simulator.ts';
import { formatSpotLine } from './spot-line.ts';

/**
 * The fake feed as a process: the demo station's receivers, live from now on, on a TCP port. The seed and
 * the first night must be those that the past nights were made with, or the night would not continue them.
 */
const environment = z.object({
  FEED_HOST: z.string().default('127.0.0.1'),
  FEED_PORT: z.coerce.number().int().min(0).max(65535).default(7373),
  FEED_SPEED: z.coerce.number().positive().max(1000).default(1),
  DEMO_SEED: z.coerce.number().int().default(demoSeed),
  DEMO_FIRST_NIGHT: z.iso.date().optional(),
  LOG_LEVEL: z.string().default('info'),
});

const tickMs = 250;

const parsed = environment.safeParse(process.env);
if (!parsed.success) {
  const sentences = parsed.error.issues.map((issue) => `${issue.path.join('.')}: ${issue.message}`);
  process.stderr.write(`The fake feed cannot start. ${sentences.join(' ')}\n`);
  process.exit(1);
}
const env = parsed.data;
const logger = createLogger('fake-feed', env.LOG_LEVEL);
const shutdown = createShutdown(logger, 2_000);
const startedMs = Date.now();
const simulator = createSimulator({
  seed: env.DEMO_SEED,
  scenario: createDemoScenario(env.DEMO_FIRST_NIGHT ?? demoFirstNight(startedMs)),
});
const server = await startLineServer({ port: env.FEED_PORT, host: env.FEED_HOST });
shutdown.onStop('line server', () => server.close());

const live = simulator.live({ fromMs: startedMs, speed: env.FEED_SPEED });
const timer = setInterval(() => {
  for (const spot of live.advance(Date.now())) server.send(formatSpotLine(spot));
}, tickMs);
shutdown.onStop('clock', () => clearInterval(timer));
shutdown.listenForSignals();
logger.info({ port: server.port, speed: env.FEED_SPEED }, 'listening');
