import type { EntityManager } from 'typeorm';
import type { CallFacts, ComparedAntenna, NightTally } from '../../../shared/comparison/index.ts';
import { unpackHeardOnly, unpackUnits } from '../../../shared/pairing/index.ts';
import type { HeardOnlyColumns, UnitColumns } from '../../../shared/pairing/index.ts';

/** Nights [from, to], both included; null: open on that side. */
export interface NightRange {
  fromNight: string | null;
  toNight: string | null;
}

export interface PairUnits {
  units: UnitColumns;
  heardOnly: HeardOnlyColumns;
}

/**
 * The packed units of two antennas over a range of nights, and those that two receivers on one antenna made.
 * A season of one pair is read in about 10 ms.
 */
export async function readPairUnits(
  manager: EntityManager,
  stationId: number,
  rulesKey: string,
  antennas: readonly [number, number],
  nights: NightRange,
): Promise<PairUnits> {
  const rows: { units: Buffer; heard_only: Buffer }[] = await manager.query(
    `SELECT units, heard_only FROM unit_pack
     WHERE station_id = $1 AND rules_key = $2
       AND ((antenna_a = $3 AND antenna_b = $4) OR antenna_a = antenna_b)
       AND night >= coalesce($5::date, '-infinity') AND night <= coalesce($6::date, 'infinity')
     ORDER BY antenna_a = antenna_b, night, antenna_a`,
    [stationId, rulesKey, Math.min(...antennas), Math.max(...antennas), nights.fromNight, nights.toNight],
  );
  return {
    units: unpackUnits(rows.map((row) => row.units).filter((pack) => pack.length > 0)),
    heardOnly: unpackHeardOnly(rows.map((row) => row.heard_only).filter((pack) => pack.length > 0)),
  };
}

export async function readCalls(
  manager: EntityManager,
  stationId: number,
  callIds: Iterable<number>,
): Promise<Map<number, CallFacts>> {
  const rows: {
    id: number;
    call: string;
    country: string | null;
    azimuth: number | null;
    spread: number | null;
    distance: number | null;
  }[] = await manager.query(
    `SELECT c.id, c.call, b.country, b.azimuth_deg AS azimuth, b.spread_deg AS spread, b.distance_km AS distance
       FROM call_sign c LEFT JOIN call_bearing b ON b.station_id = $1 AND b.call_id = c.id
       WHERE c.id = ANY($2::int[])`,
    [stationId, [...new Set(callIds)]],
  );
  return new Map(
    rows.map((row) => [
      row.id,
      {
        call: row.call,
        country: row.country,
        azimuthDeg: row.azimuth,
        spreadDeg: row.spread,
        distanceKm: row.distance,
      },
    ]),
  );
}

export async function readNightTallies(
  manager: EntityManager,
  stationId: number,
  rulesKey: string,
  nights: NightRange,
): Promise<{ night: string; tally: NightTally }[]> {
  const rows: { night: string; tally: Omit<NightTally, 'levels'> & Partial<NightTally> }[] =
    await manager.query(
      `SELECT night, tally FROM unit_night
     WHERE station_id = $1 AND rules_key = $2
       AND night >= coalesce($3::date, '-infinity') AND night <= coalesce($4::date, 'infinity')
     ORDER BY night`,
      [stationId, rulesKey, nights.fromNight, nights.toNight],
    );
  // A night that the worker has not made anew since levels are counted has none yet.
  return rows.map(({ night, tally }) => ({ night, tally: { ...tally, levels: tally.levels ?? [] } }));
}

/** Hours marked dirty, oldest first; the service turns them into nights. */
export async function readDirtyHours(manager: EntityManager, stationId: number): Promise<number[]> {
  const rows: { starts_at: Date }[] = await manager.query(
    'SELECT starts_at FROM dirty_block WHERE station_id = $1 ORDER BY starts_at LIMIT 20000',
    [stationId],
  );
  return rows.map((row) => row.starts_at.getTime());
}

export async function findAntenna(
  manager: EntityManager,
  stationId: number,
  id: number,
): Promise<ComparedAntenna | null> {
  const rows: { id: number; name: string; marker: string; heading: number | null }[] = await manager.query(
    'SELECT id, name, marker, heading_deg AS heading FROM antenna WHERE station_id = $1 AND id = $2',
    [stationId, id],
  );
  const row = rows[0];
  return row ? { id: row.id, name: row.name, marker: row.marker, headingDeg: row.heading } : null;
}

/** A job that already makes these units, if one waits or runs. */
export async function findUnitsJob(
  manager: EntityManager,
  stationId: number,
  rulesKey: string,
): Promise<number | null> {
  const rows: { id: number }[] = await manager.query(
    `SELECT id FROM job WHERE station_id = $1 AND kind = 'units' AND state IN ('queued', 'running')
       AND NOT cancel_requested AND payload->>'rulesKey' = $2 ORDER BY id LIMIT 1`,
    [stationId, rulesKey],
  );
  return rows[0]?.id ?? null;
}
