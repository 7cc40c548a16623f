import pg from 'pg';
import type { Logger } from './logger.ts';

export interface ListenerOptions {
  url: string;
  channels: string[];
  logger: Logger;
  onMessage: (channel: string, payload: string) => void;
  /** Called after every (re)connection: what was missed meanwhile has to be read from the tables. */
  onConnected?: () => void;
}

/**
 * A connection of its own that listens for NOTIFY and comes back by itself. A pooled connection cannot
 * serve: it would be handed to somebody else and the subscription lost without an error.
 */
export function createListener(options: ListenerOptions) {
  let client: pg.Client | null = null;
  let stopped = false;
  let timer: NodeJS.Timeout | null = null;
  let delayMs = 200;

  async function connect(): Promise<void> {
    const fresh = new pg.Client({
      connectionString: options.url,
      application_name: 'whichwire listener',
      keepAlive: true,
      keepAliveInitialDelayMillis: 10_000,
    });
    fresh.on('error', (error) => lost(fresh, error));
    fresh.on('end', () => lost(fresh, null));
    fresh.on('notification', (message) => options.onMessage(message.channel, message.payload ?? ''));
    try {
      await fresh.connect();
      for (const channel of options.channels) await fresh.query(`LISTEN ${pg.escapeIdentifier(channel)}`);
      if (stopped) return void (await fresh.end());
      client = fresh;
      delayMs = 200;
      options.onConnected?.();
    } catch (error) {
      lost(fresh, error);
    }
  }

  function lost(which: pg.Client, error: unknown): void {
    if (stopped || timer !== null || (client !== null && client !== which)) return;
    client = null;
    if (error) options.logger.warn({ err: error }, 'the notification connection was lost');
    void which.end().catch(() => undefined);
    timer = setTimeout(() => {
      timer = null;
      void connect();
    }, delayMs);
    delayMs = Math.min(delayMs * 2, 5_000);
  }

  return {
    start: connect,
    async stop(): Promise<void> {
      stopped = true;
      if (timer) clearTimeout(timer);
      await client?.end().catch(() => undefined);
    },
  };
}
