import type { EntityManager } from 'typeorm';
import type { QueryOf, ReplyOf } from '../../../shared/contracts/endpoint.ts';
import type { mapSpots } from '../../../shared/contracts/spot.ts';
import { InvalidRequest } from '../../platform/errors.ts';
import { refuseTurnedRange } from './spot-extent.read-model.ts';

/** Every spot of the range is read: a month is about what may be waited for. */
const longestDays = 31;
const dayMs = 86_400_000;
/** More dots than a map can show apart; the stations heard most often come first. */
const mostStations = 5000;

/** Stations heard in a stretch of time; those without a bearing (maritime mobile, unknown) have no place. */
export async function spotMap(
  manager: EntityManager,
  stationId: number,
  query: QueryOf<typeof mapSpots>,
): Promise<ReplyOf<typeof mapSpots>> {
  refuseTurnedRange(query.from, query.to);
  if (Date.parse(query.to) - Date.parse(query.from) > longestDays * dayMs) {
    const message = `Choose at most ${longestDays} days for the map.`;
    throw new InvalidRequest(message, [{ path: 'query.to', message }]);
  }
  const stations: ReplyOf<typeof mapSpots>['stations'] = await manager.query(
    `SELECT c.call, b.country, b.latitude_deg AS "latitudeDeg", b.longitude_deg AS "longitudeDeg",
       b.azimuth_deg AS "azimuthDeg", b.distance_km AS "distanceKm", heard.spots, heard.best AS "bestSnrDb"
     FROM (
       SELECT call_id, count(*)::int AS spots, max(snr_db)::int AS best FROM spot
       WHERE station_id = $1 AND heard_at >= date_trunc('second', $2::timestamptz) AND heard_at < $3::timestamptz
         AND heard_at + heard_ms * interval '1 millisecond' >= $2::timestamptz
         AND heard_at + heard_ms * interval '1 millisecond' < $3::timestamptz
         AND ($4::int IS NULL OR band_m = $4)
       GROUP BY call_id) AS heard
     JOIN call_bearing b ON b.station_id = $1 AND b.call_id = heard.call_id
     JOIN call_sign c ON c.id = heard.call_id
     WHERE b.azimuth_deg IS NOT NULL AND b.latitude_deg IS NOT NULL AND b.longitude_deg IS NOT NULL
       AND b.distance_km IS NOT NULL
     ORDER BY heard.spots DESC, c.call LIMIT $5`,
    [stationId, query.from, query.to, query.bandMetres ?? null, mostStations],
  );
  return { stations };
}
