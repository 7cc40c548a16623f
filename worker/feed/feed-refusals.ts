import type { EntityManager } from 'typeorm';
import { refusalsKeptPerFeed } from '../jobs/housekeeping.ts';

export interface FeedRefusalRow {
  receivedAtMs: number;
  reason: string;
  raw: string;
}

/** PostgreSQL's text cannot hold the character zero. */
const storable = (text: string): string => text.replaceAll('\0', '\ufffd').slice(0, 1_000);

/**
 * Keeps refused lines, the newest 10,000 of a feed: older ones go a thousand at a time. Of a feed that was
 * removed meanwhile nothing is kept.
 */
export function createRefusalKeeper(stationId: number, feedId: number) {
  // As if full: who knows how many were there before this process.
  let sinceTrim = Number.POSITIVE_INFINITY;

  return async (manager: EntityManager, refusals: readonly FeedRefusalRow[]): Promise<void> => {
    if (refusals.length === 0) return;
    await manager.query(
      `INSERT INTO feed_refusal (station_id, feed_id, received_at, reason, raw)
       SELECT f.station_id, f.id, r.* FROM feed f, unnest($3::timestamptz[], $4::text[], $5::text[]) AS r
       WHERE f.station_id = $1 AND f.id = $2`,
      [
        stationId,
        feedId,
        refusals.map(({ receivedAtMs }) => new Date(receivedAtMs)),
        refusals.map(({ reason }) => storable(reason)),
        refusals.map(({ raw }) => storable(raw)),
      ],
    );
    sinceTrim += refusals.length;
    if (sinceTrim < 1_000) return;
    sinceTrim = 0;
    await manager.query(
      `DELETE FROM feed_refusal WHERE station_id = $1 AND feed_id = $2 AND id <= (
         SELECT id FROM feed_refusal WHERE station_id = $1 AND feed_id = $2
         ORDER BY id DESC OFFSET $3 LIMIT 1)`,
      [stationId, feedId, refusalsKeptPerFeed],
    );
  };
}
