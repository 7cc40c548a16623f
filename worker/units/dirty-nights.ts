import type { DataSource, EntityManager } from 'typeorm';
import { Station } from '../../server/database/entities/station.ts';
import { inTransaction } from '../../server/database/transaction.ts';
import { publish } from '../../server/platform/notify.ts';
import { parseRulesKey, rulesKey } from '../../shared/pairing/index.ts';
import type { PairingRules } from '../../shared/pairing/index.ts';
import { nightDate, nightEndMs, nightIndexOf } from '../../shared/radio/night.ts';
import { lockNight, makeNight } from './night-maker.ts';

const hourMs = 3_600_000;
/** Sets of other rules that are kept up to date with a changed night; older ones are made again on demand. */
const otherRulesKept = 3;

export function standingRules(station: Station): PairingRules {
  return {
    blockMinutes: station.blockMinutes,
    windowSeconds: station.windowSeconds,
    freqToleranceKhz: station.freqTolerance100hz / 10,
    guardSeconds: station.guardSeconds,
  };
}

export async function stationsWithDirtyBlocks(dataSource: DataSource): Promise<number[]> {
  const rows: { station_id: number }[] = await dataSource.query(
    'SELECT DISTINCT station_id FROM dirty_block ORDER BY 1',
  );
  return rows.map((row) => row.station_id);
}

/**
 * Makes the night of the station's oldest dirty hour anew, in one transaction with the removal of its
 * marks: a maker that dies leaves the marks, one that finishes leaves the units. Any number may run side by
 * side. Returns the nights made; none when nothing (or only what others hold) is dirty.
 */
export async function makeOldestDirtyNight(
  dataSource: DataSource,
  stationId: number,
  nowMs: number,
): Promise<string[]> {
  return inTransaction(dataSource, async (manager) => {
    const station = await manager.findOneBy(Station, { id: stationId });
    if (!station) return [];
    const nights = await claimNights(manager, station);
    if (nights.length === 0) return [];
    const standing = standingRules(station);
    for (const night of nights) {
      await lockNight(manager, stationId, night);
      await makeNight(manager, station, night, standing, nowMs);
      await followWithOtherRules(manager, station, night, rulesKey(standing), nowMs);
    }
    const dates = nights.map(nightDate);
    await publish(manager, stationId, { type: 'units', nights: dates });
    return dates;
  });
}

/**
 * Takes the oldest dirty hour and all others of its night. Hours that a writer or another maker holds are
 * left for the next round.
 *
 * The hour in which one night ends and the next begins concerns both. When the next night has another mark
 * that is free, that mark will have it made anyway, so this round leaves it out; otherwise a whole season
 * would be made twice. A mark that another maker holds does not count: that maker may have read its spots
 * before ours came.
 */
async function claimNights(manager: EntityManager, station: Station): Promise<number[]> {
  const oldest: { starts_at: Date }[] = await manager.query(
    `SELECT starts_at FROM dirty_block WHERE station_id = $1 ORDER BY starts_at LIMIT 1 FOR UPDATE SKIP LOCKED`,
    [station.id],
  );
  if (!oldest[0]) return [];
  const firstMs = oldest[0].starts_at.getTime();
  const night = nightIndexOf(firstMs, station.longitudeDeg);
  const nightEnd = nightEndMs(night, station.longitudeDeg);
  const [claimed]: [{ starts_at: Date }[], number] = await manager.query(
    `DELETE FROM dirty_block d USING (
       SELECT starts_at FROM dirty_block WHERE station_id = $1 AND starts_at >= $2 AND starts_at < $3
       ORDER BY starts_at FOR UPDATE SKIP LOCKED) AS mine
     WHERE d.station_id = $1 AND d.starts_at = mine.starts_at RETURNING d.starts_at`,
    [station.id, new Date(firstMs), new Date(nightEnd)],
  );
  const reachesOver = claimed.some(({ starts_at }) => starts_at.getTime() + hourMs > nightEnd);
  if (!reachesOver) return [night];
  const nextHasMarks: unknown[] = await manager.query(
    `SELECT 1 FROM dirty_block WHERE station_id = $1 AND starts_at >= $2 AND starts_at < $3
     ORDER BY starts_at LIMIT 1 FOR UPDATE SKIP LOCKED`,
    [station.id, new Date(nightEnd), new Date(nightEndMs(night + 1, station.longitudeDeg))],
  );
  return nextHasMarks.length > 0 ? [night] : [night, night + 1];
}

/** Other rules that somebody asked for lately follow the change; the rest of their units for the night go. */
async function followWithOtherRules(
  manager: EntityManager,
  station: Station,
  night: number,
  standingKey: string,
  nowMs: number,
): Promise<void> {
  const date = nightDate(night);
  const others: { rules_key: string }[] = await manager.query(
    `SELECT rules_key FROM unit_night WHERE station_id = $1 AND night = $2 AND rules_key <> $3 ORDER BY made_at DESC`,
    [station.id, date, standingKey],
  );
  for (const [rank, { rules_key }] of others.entries()) {
    if (rank < otherRulesKept) {
      await makeNight(manager, station, night, parseRulesKey(rules_key), nowMs);
      continue;
    }
    // Live spots change this night all the time: its units are left as they are and count as old once it is over.
    if (night === nightIndexOf(nowMs, station.longitudeDeg)) continue;
    for (const table of ['unit_pack', 'unit_night']) {
      await manager.query(`DELETE FROM ${table} WHERE station_id = $1 AND rules_key = $2 AND night = $3`, [
        station.id,
        rules_key,
        date,
      ]);
    }
  }
}

/** Makes everything that is dirty now; for tests, the demo's loading and the bench. */
export async function makeAllDirtyNights(
  dataSource: DataSource,
  nowMs: number,
  onNight?: (nights: string[]) => void,
) {
  let made = 0;
  for (const stationId of await stationsWithDirtyBlocks(dataSource)) {
    for (;;) {
      const nights = await makeOldestDirtyNight(dataSource, stationId, nowMs);
      if (nights.length === 0) break;
      made += nights.length;
      onNight?.(nights);
    }
  }
  return made;
}
