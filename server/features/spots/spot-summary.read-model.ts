import type { EntityManager } from 'typeorm';
import type { ReplyOf } from '../../../shared/contracts/endpoint.ts';
import type { countSpots } from '../../../shared/contracts/spot.ts';
import {
  nightDate,
  nightEndMs,
  nightIndexOf,
  nightIndexOfDate,
  nightStartMs,
} from '../../../shared/radio/night.ts';
import { Station } from '../../database/entities/station.ts';
import { spotExtent } from './spot-extent.read-model.ts';

/** Changed nights that are counted anew although they have been made before; the newest is the live one. */
const changedNightsCounted = 10;
const hourMs = 3_600_000;

/**
 * Spots a night. A night whose units have been made carries its count, under whatever rules they were made;
 * only nights that have changed since, or that have not been made yet, are counted here. A night that is
 * neither made nor marked has no spots: whoever stores a spot marks its hour.
 */
export async function spotSummary(
  manager: EntityManager,
  stationId: number,
): Promise<ReplyOf<typeof countSpots>> {
  const { longitudeDeg } = await manager.findOneByOrFail(Station, { id: stationId });
  const made: { night: string; spots: number }[] = await manager.query(
    `SELECT DISTINCT ON (night) night, spots FROM unit_night WHERE station_id = $1 ORDER BY night, made_at DESC`,
    [stationId],
  );
  const counts = new Map(made.map((row) => [row.night, row.spots]));
  const changed = await changedNights(manager, stationId, longitudeDeg);
  const uncertain = changed.filter(
    (night, age) => age < changedNightsCounted || !counts.has(nightDate(night)),
  );
  for (const { night, spots } of await countNights(manager, stationId, uncertain, longitudeDeg)) {
    counts.set(night, spots);
  }
  const nights = [...counts]
    .filter(([, spots]) => spots > 0)
    .map(([night, spots]) => ({ night, spots }))
    .sort((p, q) => nightIndexOfDate(p.night) - nightIndexOfDate(q.night));
  const extent = await spotExtent(manager, stationId);
  return {
    nights,
    total: nights.reduce((sum, night) => sum + night.spots, 0),
    firstAt: extent && new Date(extent.firstMs).toISOString(),
    lastAt: extent && new Date(extent.lastMs).toISOString(),
  };
}

/** Nights of the hours that are marked, newest first. */
async function changedNights(
  manager: EntityManager,
  stationId: number,
  longitudeDeg: number,
): Promise<number[]> {
  const hours: { starts_at: Date }[] = await manager.query(
    'SELECT starts_at FROM dirty_block WHERE station_id = $1',
    [stationId],
  );
  const nights = new Set<number>();
  for (const { starts_at } of hours) {
    nights.add(nightIndexOf(starts_at.getTime(), longitudeDeg));
    nights.add(nightIndexOf(starts_at.getTime() + hourMs - 1, longitudeDeg));
  }
  return [...nights].sort((p, q) => q - p);
}

/** From the index alone: the longitude of every locator puts the night's edges on whole seconds. */
async function countNights(
  manager: EntityManager,
  stationId: number,
  nights: readonly number[],
  longitudeDeg: number,
): Promise<{ night: string; spots: number }[]> {
  const edge = (timeMs: number) => new Date(timeMs).toISOString();
  return manager.query(
    `SELECT night, heard.spots
     FROM unnest($2::date[], $3::timestamptz[], $4::timestamptz[]) AS n (night, f, u)
     CROSS JOIN LATERAL (
       SELECT count(*)::int AS spots FROM spot WHERE station_id = $1 AND heard_at >= f AND heard_at < u) AS heard`,
    [
      stationId,
      nights.map(nightDate),
      nights.map((night) => edge(nightStartMs(night, longitudeDeg))),
      nights.map((night) => edge(nightEndMs(night, longitudeDeg))),
    ],
  );
}
