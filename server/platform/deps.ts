import type { DataSource } from 'typeorm';
import type { Config } from './config.ts';
import type { DemoMailbox } from './demo-mailbox.ts';
import type { EventHub } from './event-hub.ts';
import type { HeavyWork } from './heavy-work.ts';
import type { Logger } from './logger.ts';
import type { Mailer } from './mailer.ts';
import type { RateLimits } from '../middleware/rate-limit.ts';

/** What a feature may be built from. main.ts passes the real parts, tests pass fakes of hosted services. */
export interface Deps {
  config: Config;
  logger: Logger;
  dataSource: DataSource;
  mailer: Mailer;
  /** null outside demo mode. */
  demoMailbox: DemoMailbox | null;
  eventHub: EventHub;
  rateLimits: RateLimits;
  heavyWork: HeavyWork;
  /** The present, in milliseconds; tests set it. */
  now: () => number;
}
