import pg from 'pg';
import type { Logger } from '../../server/platform/logger.ts';

/** The first half of the advisory lock's key; the second is the feed's id. */
const lockClass = 0x57_48_46;

export interface FeedClaims {
  /** A connection that holds the claims, made anew when it was lost; throws while there is none. */
  ensure(): Promise<{ fresh: boolean }>;
  /** Takes the feed for this process; false while another has it. */
  take(feedId: number): Promise<boolean>;
  give(feedId: number): Promise<void>;
  /** Gives all of them back. */
  stop(): Promise<void>;
}

/**
 * Which process reads which feed: session-level advisory locks on a connection of their own. When the
 * process dies or its machine is lost, PostgreSQL ends the session and another takes the feed over;
 * nobody has to guess from a time stamp who is alive.
 */
export function createFeedClaims(url: string, logger: Logger, onLost: () => void): FeedClaims {
  let client: pg.Client | null = null;

  async function open(): Promise<void> {
    const fresh = new pg.Client({
      connectionString: url,
      application_name: 'whichwire feed claims',
      connectionTimeoutMillis: 10_000,
      keepAlive: true,
      keepAliveInitialDelayMillis: 10_000,
    });
    const lost = (error: Error | null): void => {
      if (client !== fresh) return;
      client = null;
      logger.warn({ err: error ?? undefined }, 'the claims on feeds were lost with their connection');
      onLost();
    };
    fresh.on('error', lost);
    fresh.on('end', () => lost(null));
    await fresh.connect();
    // A host that lost its power would keep its feeds for two hours by the system's defaults.
    await fresh.query(
      'SET tcp_keepalives_idle = 10; SET tcp_keepalives_interval = 5; SET tcp_keepalives_count = 3',
    );
    client = fresh;
  }

  async function ask(query: string, feedId: number): Promise<boolean> {
    if (client === null) throw new Error('The connection that holds the claims on feeds is lost.');
    const { rows } = await client.query<{ ok: boolean }>(query, [lockClass, feedId]);
    return rows[0]?.ok ?? false;
  }

  return {
    async ensure() {
      if (client !== null) return { fresh: false };
      await open();
      return { fresh: true };
    },
    take: (feedId) => ask('SELECT pg_try_advisory_lock($1, $2) AS ok', feedId),
    async give(feedId) {
      await ask('SELECT pg_advisory_unlock($1, $2) AS ok', feedId);
    },
    async stop() {
      const last = client;
      client = null;
      await last?.end();
    },
  };
}
