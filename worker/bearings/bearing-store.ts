import type { EntityManager } from 'typeorm';
import { bearingOfCall, readOverrides, type Bearing, type OverrideRow } from './bearing-of-call.ts';

interface CallRow {
  id: number;
  call: string;
}

/**
 * Fills in the bearings of calls that have none yet, in the caller's transaction. Returns a sentence for
 * each of the station's corrections that could not be used.
 */
export async function ensureBearings(
  manager: EntityManager,
  stationId: number,
  callIds: readonly number[],
): Promise<string[]> {
  const missing: CallRow[] = await manager.query(
    `SELECT c.id, c.call FROM call_sign c
     WHERE c.id = ANY($2)
       AND NOT EXISTS (SELECT FROM call_bearing b WHERE b.station_id = $1 AND b.call_id = c.id)
     ORDER BY c.id`,
    [stationId, callIds],
  );
  return missing.length === 0 ? [] : storeBearings(manager, stationId, missing, 'DO NOTHING');
}

/** One step of computing a station's bearings anew. */
export interface BearingStep {
  /** To be given to the next step; null when no call is left. */
  lastCallId: number | null;
  calls: number;
  unfit: string[];
}

/** Computes the bearings of the next `limit` calls of the dictionary anew, in the caller's transaction. */
export async function recomputeBearings(
  manager: EntityManager,
  stationId: number,
  afterCallId: number,
  limit: number,
): Promise<BearingStep> {
  const calls: CallRow[] = await manager.query(
    'SELECT id, call FROM call_sign WHERE id > $1 ORDER BY id LIMIT $2',
    [afterCallId, limit],
  );
  const unfit = calls.length === 0 ? [] : await storeBearings(manager, stationId, calls, replaceAll);
  return { lastCallId: calls.at(-1)?.id ?? null, calls: calls.length, unfit };
}

const columns = [
  'country',
  'source',
  'latitude_deg',
  'longitude_deg',
  'radius_km',
  'azimuth_deg',
  'distance_km',
  'spread_deg',
];
const replaceAll = `DO UPDATE SET ${columns.map((column) => `${column} = excluded.${column}`).join(', ')}`;

async function storeBearings(
  manager: EntityManager,
  stationId: number,
  calls: readonly CallRow[],
  onConflict: string,
): Promise<string[]> {
  // Holds the station where it is until the commit: a move waits for it, and then deletes these rows too.
  const stations: { latitude: number; longitude: number }[] = await manager.query(
    'SELECT latitude_deg AS latitude, longitude_deg AS longitude FROM station WHERE id = $1 FOR SHARE',
    [stationId],
  );
  const station = stations[0];
  if (station === undefined) throw new Error(`There is no station ${stationId}.`);
  const rows: OverrideRow[] = await manager.query(
    'SELECT matches, pattern, locator, radius_km FROM position_override WHERE station_id = $1 ORDER BY id',
    [stationId],
  );
  const { overrides, unfit } = readOverrides(rows);
  const bearings = calls.map(({ call }) => bearingOfCall(call, station, overrides));
  const column = (name: keyof Bearing): (string | number | null)[] =>
    bearings.map((bearing) => bearing[name]);
  await manager.query(
    `INSERT INTO call_bearing (station_id, call_id, ${columns.join(', ')})
     SELECT $1, * FROM unnest($2::integer[], $3::text[], $4::text[], $5::real[], $6::real[], $7::real[],
       $8::real[], $9::real[], $10::real[])
     ON CONFLICT (station_id, call_id) ${onConflict}`,
    [
      stationId,
      calls.map(({ id }) => id),
      column('country'),
      column('source'),
      column('latitudeDeg'),
      column('longitudeDeg'),
      column('radiusKm'),
      column('azimuthDeg'),
      column('distanceKm'),
      column('spreadDeg'),
    ],
  );
  return unfit;
}
