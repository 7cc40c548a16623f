import type { EntityManager } from 'typeorm';
import { unpackUnits } from '../../../shared/pairing/index.ts';
import type { UnitColumns } from '../../../shared/pairing/index.ts';
import type { NightRange } from '../units/units.read-model.ts';

/** The packed units of all pairs of antennas over a range of nights, pair by pair. */
export async function readAllUnits(
  manager: EntityManager,
  stationId: number,
  rulesKey: string,
  nights: NightRange,
): Promise<UnitColumns> {
  const rows: { units: Buffer }[] = await manager.query(
    `SELECT units FROM unit_pack
     WHERE station_id = $1 AND rules_key = $2 AND unit_count > 0
       AND night >= coalesce($3::date, '-infinity') AND night <= coalesce($4::date, 'infinity')
     ORDER BY antenna_a, antenna_b, night`,
    [stationId, rulesKey, nights.fromNight, nights.toNight],
  );
  return unpackUnits(rows.map((row) => row.units));
}

/** The first and the last night that units were made for, also where a night gave none. */
export async function readNightsMade(
  manager: EntityManager,
  stationId: number,
  rulesKey: string,
  nights: NightRange,
): Promise<{ firstNight: string | null; lastNight: string | null }> {
  const rows: { first: string | null; last: string | null }[] = await manager.query(
    `SELECT min(night)::text AS first, max(night)::text AS last FROM unit_night
     WHERE station_id = $1 AND rules_key = $2
       AND night >= coalesce($3::date, '-infinity') AND night <= coalesce($4::date, 'infinity')`,
    [stationId, rulesKey, nights.fromNight, nights.toNight],
  );
  return { firstNight: rows[0]?.first ?? null, lastNight: rows[0]?.last ?? null };
}
