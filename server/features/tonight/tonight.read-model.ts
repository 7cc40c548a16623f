import type { EntityManager } from 'typeorm';

export interface ReceiverNow {
  id: number;
  call_sign: string;
  label: string;
  antenna_id: number | null;
  antenna_name: string | null;
  antenna_marker: string | null;
  since: Date | null;
  spots: number;
}

/** What each receiver in use is on at the instant, and how much it has reported in the ten minutes before. */
export async function readReceiversNow(
  manager: EntityManager,
  stationId: number,
  at: Date,
): Promise<ReceiverNow[]> {
  return manager.query(
    `SELECT r.id, r.call_sign, r.label, d.antenna_id, a.name AS antenna_name, a.marker AS antenna_marker,
       d.starts_at AS since,
       (SELECT count(*)::int FROM spot s WHERE s.station_id = $1 AND s.receiver_id = r.id
          AND s.heard_at > $2::timestamptz - interval '10 minutes' AND s.heard_at <= $2) AS spots
     FROM receiver r
     LEFT JOIN dwell d ON d.station_id = r.station_id AND d.receiver_id = r.id AND d.during @> $2::timestamptz
     LEFT JOIN antenna a ON a.station_id = d.station_id AND a.id = d.antenna_id
     WHERE r.station_id = $1 AND r.retired_at IS NULL
     ORDER BY r.id`,
    [stationId, at],
  );
}

/** Bands with spots in the two hours before the instant, the busiest first. */
export async function readBusyBands(manager: EntityManager, stationId: number, at: Date): Promise<number[]> {
  const rows: { band: number }[] = await manager.query(
    `SELECT band_m AS band FROM spot
     WHERE station_id = $1 AND heard_at > $2::timestamptz - interval '2 hours' AND heard_at <= $2
     GROUP BY band_m ORDER BY count(*) DESC LIMIT 6`,
    [stationId, at],
  );
  return rows.map((row) => row.band);
}

/** Antennas that can be put on a receiver on the day: in service, and named by the switch log at least once. */
export async function readUsableAntennas(manager: EntityManager, stationId: number, day: string) {
  const rows: { id: number; name: string; marker: string; heading: number | null }[] = await manager.query(
    `SELECT a.id, a.name, a.marker, a.heading_deg AS heading FROM antenna a
     WHERE a.station_id = $1
       AND coalesce(a.in_service_from, '-infinity') <= $2::date AND coalesce(a.in_service_to, 'infinity') >= $2::date
       AND EXISTS (SELECT 1 FROM dwell d WHERE d.station_id = a.station_id AND d.antenna_id = a.id)
     ORDER BY a.id`,
    [stationId, day],
  );
  return rows.map(({ id, name, marker, heading }) => ({ id, name, marker, headingDeg: heading }));
}
