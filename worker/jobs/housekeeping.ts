import type { DataSource } from 'typeorm';

/** Refusals kept of each feed; a feed that sends rubbish all night must not fill the disk. */
export const refusalsKeptPerFeed = 10_000;

/** What is cleared away, each by a statement of its own: one that fails must not keep the others back. */
const clearings: Readonly<Record<string, string>> = {
  // A month after its end nobody asks about a session any more; its refresh tokens go with it.
  sessions: `DELETE FROM session
    WHERE least(expires_at, coalesce(revoked_at, expires_at)) < now() - interval '30 days'`,
  'password resets': `DELETE FROM password_reset WHERE expires_at < now() - interval '7 days'`,
  'rate limits': `DELETE FROM rate_limit WHERE expire < (extract(epoch FROM now()) - 3600) * 1000`,
  // Much longer than any clock of any worker may be wrong.
  'timed runs': `DELETE FROM timed_run WHERE tick < now() - interval '7 days'`,
  // Materialized: the edge of a feed is looked for once, not once for each of its rows.
  'feed refusals': `WITH edge AS MATERIALIZED (
      SELECT f.station_id, f.id AS feed_id, (
        SELECT k.id FROM feed_refusal k WHERE k.station_id = f.station_id AND k.feed_id = f.id
        ORDER BY k.id DESC OFFSET ${refusalsKeptPerFeed} LIMIT 1) AS last_id
      FROM feed f)
    DELETE FROM feed_refusal r USING edge
    WHERE r.station_id = edge.station_id AND r.feed_id = edge.feed_id AND r.id <= edge.last_id`,
};

/**
 * Clears away what nobody needs any more and makes the months that are about to begin. Safe to run at any
 * time and by two workers at once. Throws an AggregateError when some of it failed.
 */
export async function keepHouse(dataSource: DataSource): Promise<Record<string, number>> {
  const cleared: Record<string, number> = {};
  const errors: unknown[] = [];
  for (const [what, statement] of Object.entries(clearings)) {
    try {
      const [, count]: [unknown, number] = await dataSource.query(statement);
      cleared[what] = count;
    } catch (error) {
      errors.push(error);
    }
  }
  try {
    await dataSource.query(`SELECT ensure_spot_partitions(now(), now() + interval '1 month')`);
  } catch (error) {
    errors.push(error);
  }
  if (errors.length > 0) throw new AggregateError(errors, 'Some of the housekeeping failed.');
  return cleared;
}
