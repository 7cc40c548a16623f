import type { EntityManager } from 'typeorm';
import type pg from 'pg';
import type { NightTally } from '../../shared/comparison/index.ts';
import { packHeardOnly, packUnits, pairSpots, rulesKey, spotsNeeded } from '../../shared/pairing/index.ts';
import type { DwellColumns, PairingResult, PairingRules } from '../../shared/pairing/index.ts';
import { nightDate, nightEndMs, nightStartMs } from '../../shared/radio/night.ts';
import { readSpotColumns } from './spot-columns-reader.ts';

/** Namespace of the advisory lock on (station, night); any constant that nothing else uses. */
const nightLock = 7_301;
const dayNumbers = 1_000_000;

/**
 * One maker a night at a time. Taken before anything is read: whoever comes second then reads what the
 * first has committed, instead of overwriting it with older units.
 */
export async function lockNight(
  manager: EntityManager,
  stationId: number,
  nightIndex: number,
): Promise<void> {
  await manager.query('SELECT pg_advisory_xact_lock($1::int, $2::int)', [
    nightLock,
    (stationId * 40_009 + (nightIndex % dayNumbers)) % 2_147_483_647,
  ]);
}

/**
 * Makes the units of one night under one set of rules anew and puts them in place of what was there, in the
 * caller's transaction. Idempotent. Returns the number of spots of the night.
 */
export async function makeNight(
  manager: EntityManager,
  station: { id: number; longitudeDeg: number },
  nightIndex: number,
  rules: PairingRules,
  nowMs: number,
): Promise<number> {
  const window = {
    startMs: nightStartMs(nightIndex, station.longitudeDeg),
    endMs: nightEndMs(nightIndex, station.longitudeDeg),
  };
  const needed = spotsNeeded(window, rules);
  const client: pg.PoolClient = await manager.queryRunner!.connect();
  const dwells = await readDwells(manager, station.id, needed.startMs, needed.endMs);
  const spots = await readSpotColumns(client, station.id, needed.startMs, needed.endMs);
  // An open dwell has listened until now, not until the night's end.
  const lastSpotMs = spots.timeMs.reduce((last, time) => Math.max(last, time), 0);
  const openEndMs = Math.max(nowMs, lastSpotMs + 1);
  dwells.endMs.forEach((endMs, i) => {
    if (endMs === Infinity) dwells.endMs[i] = Math.max(openEndMs, dwells.startMs[i]! + 1);
  });
  const result = pairSpots(spots, dwells, rules, window);
  return store(manager, station.id, nightDate(nightIndex), rules, result);
}

async function readDwells(
  manager: EntityManager,
  stationId: number,
  fromMs: number,
  toMs: number,
): Promise<DwellColumns> {
  const rows: { receiver_id: number; antenna_id: number; starts_at: Date; ends_at: Date | null }[] =
    await manager.query(
      `SELECT receiver_id, antenna_id, starts_at, ends_at FROM dwell
     WHERE station_id = $1 AND during && tstzrange($2, $3) ORDER BY starts_at`,
      [stationId, new Date(fromMs), new Date(toMs)],
    );
  return {
    receiver: Int32Array.from(rows, (row) => row.receiver_id),
    antenna: Int32Array.from(rows, (row) => row.antenna_id),
    startMs: Float64Array.from(rows, (row) => row.starts_at.getTime()),
    endMs: Float64Array.from(rows, (row) => row.ends_at?.getTime() ?? Infinity),
  };
}

async function store(
  manager: EntityManager,
  stationId: number,
  night: string,
  rules: PairingRules,
  result: PairingResult,
): Promise<number> {
  const key = rulesKey(rules);
  await manager.query('DELETE FROM unit_pack WHERE station_id = $1 AND rules_key = $2 AND night = $3', [
    stationId,
    key,
    night,
  ]);
  await manager.query('DELETE FROM unit_night WHERE station_id = $1 AND rules_key = $2 AND night = $3', [
    stationId,
    key,
    night,
  ]);
  const spots = result.tallies.reduce((sum, row) => sum + row.tagged + row.guarded + row.untagged, 0);
  if (spots === 0) return 0;

  const packs = pairPacks(result, rules.blockMinutes);
  await manager.query(
    `INSERT INTO unit_pack (station_id, rules_key, antenna_a, antenna_b, night, unit_count, heard_only_count, units, heard_only)
     SELECT $1, $2, a, b, $3, u, h, units, heard
     FROM unnest($4::int[], $5::int[], $6::int[], $7::int[], $8::bytea[], $9::bytea[]) AS t (a, b, u, h, units, heard)`,
    [
      stationId,
      key,
      night,
      packs.map((p) => p.antennaA),
      packs.map((p) => p.antennaB),
      packs.map((p) => p.unitCount),
      packs.map((p) => p.heardOnlyCount),
      packs.map((p) => p.units),
      packs.map((p) => p.heardOnly),
    ],
  );
  await manager.query(
    // The clock's time, not the transaction's: what is made later must look later, however long it waited.
    `INSERT INTO unit_night (station_id, rules_key, night, spots, tally, made_at)
     VALUES ($1, $2, $3, $4, $5, clock_timestamp())`,
    [stationId, key, night, spots, JSON.stringify(tallyOf(result))],
  );
  return spots;
}

interface StoredPack {
  antennaA: number;
  antennaB: number;
  unitCount: number;
  heardOnlyCount: number;
  /** Empty where the pair has no row of that kind. */
  units: Buffer;
  heardOnly: Buffer;
}

/** A pair may have units, heard-only rows or both: one stored row a pair all the same. */
function pairPacks(result: PairingResult, blockMinutes: number): StoredPack[] {
  const packs = new Map<string, StoredPack>();
  const of = (antennaA: number, antennaB: number) => {
    const id = `${antennaA} ${antennaB}`;
    const pack = packs.get(id) ?? {
      ...{ antennaA, antennaB, unitCount: 0, heardOnlyCount: 0 },
      ...{ units: Buffer.alloc(0), heardOnly: Buffer.alloc(0) },
    };
    packs.set(id, pack);
    return pack;
  };
  const asBuffer = (data: Uint8Array) => Buffer.from(data.buffer, data.byteOffset, data.byteLength);
  for (const { antennaA, antennaB, count, data } of packUnits(result.units, blockMinutes)) {
    Object.assign(of(antennaA, antennaB), { unitCount: count, units: asBuffer(data) });
  }
  for (const { antennaA, antennaB, count, data } of packHeardOnly(result.heardOnly, blockMinutes)) {
    Object.assign(of(antennaA, antennaB), { heardOnlyCount: count, heardOnly: asBuffer(data) });
  }
  return [...packs.values()];
}

function tallyOf(result: PairingResult): NightTally {
  const { receiver, antenna, seconds } = result.listening;
  const bySide = new Map<string, NightTally['listening'][number]>();
  for (let i = 0; i < receiver.length; i++) {
    const id = `${receiver[i]} ${antenna[i]}`;
    const row = bySide.get(id) ?? { receiver: receiver[i]!, antenna: antenna[i]!, seconds: 0 };
    row.seconds += seconds[i]!;
    bySide.set(id, row);
  }
  return {
    spots: result.tallies,
    doubles: result.doubles,
    levels: result.levels,
    listening: [...bySide.values()],
  };
}
