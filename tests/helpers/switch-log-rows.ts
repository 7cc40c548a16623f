import type { DataSource } from 'typeorm';
import { Antenna } from '../../server/database/entities/antenna.ts';
import { Dwell } from '../../server/database/entities/dwell.ts';
import { Receiver } from '../../server/database/entities/receiver.ts';
import { insertStation } from './station-rows.ts';
import type { StationRows } from './station-rows.ts';

export interface LogStation extends StationRows {
  /** EI7QSB and EI7QSC. */
  receiverIds: [number, number];
  /** Named North-east, West and Vertical. */
  antennaIds: [number, number];
  verticalId: number;
}

/** A station with two receivers and three antennas. */
export async function insertLogStation(dataSource: DataSource): Promise<LogStation> {
  const rows = await insertStation(dataSource);
  const { stationId } = rows;
  const second = await dataSource
    .getRepository(Receiver)
    .save({ stationId, callSign: 'EI7QSC', label: 'Barn' });
  const vertical = await dataSource
    .getRepository(Antenna)
    .save({ stationId, name: 'Vertical', marker: 'triangle', kind: 'vertical' });
  return { ...rows, receiverIds: [rows.receiverId, second.id], verticalId: vertical.id };
}

export interface DwellSeed {
  receiverId: number;
  antennaId: number;
  startMs: number;
  endMs: number | null;
}

/** Stores dwells past all rules but the database's own; gives their ids in the given order. */
export async function insertDwells(
  dataSource: DataSource,
  stationId: number,
  dwells: readonly DwellSeed[],
): Promise<number[]> {
  const rows = await dataSource.getRepository(Dwell).save(
    dwells.map(({ receiverId, antennaId, startMs, endMs }) => ({
      ...{ stationId, receiverId, antennaId, source: 'hand' as const },
      ...{ startsAt: new Date(startMs), endsAt: endMs === null ? null : new Date(endMs) },
    })),
  );
  return rows.map((row) => row.id);
}

export interface SpotSeed {
  receiverId: number;
  timeMs: number;
  uncertaintySeconds?: number;
  call?: string;
  bandMetres?: number;
  freq100Hz?: number;
  snrDb?: number;
}

/** Stores spots by plain SQL, not by the program's own writer. A frequency each unless one is given. */
export async function insertSpots(
  dataSource: DataSource,
  stationId: number,
  spots: readonly SpotSeed[],
): Promise<void> {
  if (spots.length === 0) return;
  const times = spots.map((spot) => spot.timeMs);
  await dataSource.query('SELECT ensure_spot_partitions($1, $2)', [
    new Date(Math.min(...times)),
    new Date(Math.max(...times)),
  ]);
  const calls = spots.map((spot) => spot.call ?? 'EA8QSH');
  await dataSource.query(
    `INSERT INTO call_sign (call) SELECT DISTINCT c FROM unnest($1::text[]) AS c ON CONFLICT DO NOTHING`,
    [calls],
  );
  await dataSource.query(
    `INSERT INTO spot (station_id, heard_at, heard_ms, receiver_id, call_id, freq_100hz, import_id, band_m, snr_db, mode, uncertainty_s)
     SELECT $1, date_trunc('second', t), round(extract(milliseconds FROM t - date_trunc('second', t))), receiver,
       c.id, freq, 0, band, snr, 1, unsure
     FROM unnest($2::timestamptz[], $3::int[], $4::text[], $5::int[], $6::int[], $7::int[], $8::int[])
       AS s (t, receiver, call, freq, band, snr, unsure)
     JOIN call_sign c ON c.call = s.call`,
    [
      stationId,
      times.map((ms) => new Date(ms).toISOString()),
      spots.map((spot) => spot.receiverId),
      calls,
      spots.map((spot, i) => spot.freq100Hz ?? 18_100 + (i % 1000)),
      spots.map((spot) => spot.bandMetres ?? 160),
      spots.map((spot) => spot.snrDb ?? 12),
      spots.map((spot) => spot.uncertaintySeconds ?? 0),
    ],
  );
}

export interface TagRow {
  key: string;
  antennaId: number | null;
  guarded: boolean;
}

/** Every spot's tag as the database's own view and plain SQL see it: the program's tagging has no part in it. */
export async function readTags(
  dataSource: DataSource,
  stationId: number,
  guardSeconds: number,
): Promise<TagRow[]> {
  return dataSource.query(
    `SELECT concat_ws(' ', heard_at, heard_ms, receiver_id, call_id, freq_100hz) AS key, antenna_id AS "antennaId",
       coalesce(at < dwell_starts_at + make_interval(secs => $2)
         OR (dwell_ends_at IS NOT NULL AND at + make_interval(secs => uncertainty_s) > dwell_ends_at), false) AS guarded
     FROM (SELECT *, heard_at + heard_ms * interval '1 millisecond' AS at FROM tagged_spot WHERE station_id = $1) AS s
     ORDER BY 1`,
    [stationId, guardSeconds],
  );
}
