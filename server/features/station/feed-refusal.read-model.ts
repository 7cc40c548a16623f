import type { EntityManager } from 'typeorm';
import { Feed } from '../../database/entities/feed.ts';
import { NotFound } from '../../platform/errors.ts';

/** The newest refused lines of a feed; the worker keeps a bounded number of them. */
export async function feedRefusalRows(
  manager: EntityManager,
  stationId: number,
  feedId: number,
): Promise<string[][]> {
  if (!(await manager.existsBy(Feed, { stationId, id: feedId }))) throw new NotFound('This feed');
  const rows: { received_at: Date; reason: string; raw: string }[] = await manager.query(
    'SELECT received_at, reason, raw FROM feed_refusal WHERE station_id = $1 AND feed_id = $2 ORDER BY id DESC LIMIT 20000',
    [stationId, feedId],
  );
  return rows.map((row) => [row.received_at.toISOString(), row.reason, row.raw]);
}
