import type { DataSource } from 'typeorm';
import type { LivePair } from '../../shared/contracts/tonight.ts';
import { dwellColumns, spotColumns } from '../../shared/pairing/index.ts';
import { findLivePairs } from '../../shared/pairing/live-pairs.ts';
import type { PairingRules } from '../../shared/pairing/rules.ts';
import { sectorOf, sectorUnsure } from '../../shared/radio/geodesic.ts';
import type { Logger } from '../../server/platform/logger.ts';
import { publish } from '../../server/platform/notify.ts';
import type { SpotRecord } from '../spots/spot-record.ts';

/** As many as one event carries. */
const mostPairs = 20;
/** A screen shows the newest; a flood of spots must not hold up the writer's database. */
const mostSpots = 5_000;
const shortestPauseMs = 1_000;

interface StationRow {
  rules: PairingRules;
  sectorCount: number;
}

interface SpotRow {
  timeMs: number;
  receiver: number;
  callId: number;
  call: string;
  band: number;
  freq100Hz: number;
  snrDb: number;
  uncertaintySeconds: number;
  country: string | null;
  azimuthDeg: number | null;
  spreadDeg: number | null;
}

/**
 * Tells the browsers of stations that two receivers on two antennas have just heard together. Works from
 * the stored spots, because the two receivers may come by different feeds in different workers; each
 * worker looks for the pairs of what it has stored itself.
 */
export function createLivePairs(dataSource: DataSource, logger: Logger) {
  const waiting = new Map<number, SpotRecord[]>();
  const working = new Map<number, Promise<void>>();
  let stopped = false;

  async function look(stationId: number): Promise<void> {
    const fresh = waiting.get(stationId) ?? [];
    waiting.delete(stationId);
    const pairs = await readNewPairs(dataSource, stationId, fresh);
    if (pairs.length > 0) await publish(dataSource.manager, stationId, { type: 'pairs', pairs });
  }

  function work(stationId: number): void {
    if (working.has(stationId) || stopped) return;
    const run = look(stationId)
      .catch((error: unknown) =>
        logger.warn({ err: error, station: stationId }, 'live pairs could not be told'),
      )
      .then(() => new Promise<void>((resolve) => setTimeout(resolve, stopped ? 0 : shortestPauseMs)))
      .finally(() => {
        working.delete(stationId);
        if (waiting.has(stationId)) work(stationId);
      });
    working.set(stationId, run);
  }

  return {
    /** Spots that were stored just now. */
    add(stationId: number, spots: readonly SpotRecord[]): void {
      const list = [...(waiting.get(stationId) ?? []), ...spots];
      waiting.set(stationId, list.slice(-mostSpots));
      work(stationId);
    },
    async stop(): Promise<void> {
      stopped = true;
      await Promise.all(working.values());
    },
  };
}

/** Pairs of which at least one spot is among the fresh ones, newest first, at most 20. */
export async function readNewPairs(
  dataSource: DataSource,
  stationId: number,
  fresh: readonly SpotRecord[],
): Promise<LivePair[]> {
  const station = await readStation(dataSource, stationId);
  if (station === null || fresh.length === 0) return [];
  const reachMs = station.rules.windowSeconds * 2000;
  let firstMs = Number.POSITIVE_INFINITY;
  let lastMs = Number.NEGATIVE_INFINITY;
  const freshKeys = new Set<string>();
  for (const spot of fresh) {
    firstMs = Math.min(firstMs, spot.heardAtMs);
    lastMs = Math.max(lastMs, spot.heardAtMs);
    freshKeys.add(keyOf(spot.heardAtMs, spot.receiverId, spot.call));
  }
  const spots = await readSpots(dataSource, stationId, firstMs - reachMs, lastMs + reachMs);
  const dwells = await readDwells(dataSource, stationId, firstMs - reachMs, lastMs + reachMs);
  const columns = spotColumns(spots.map((spot) => ({ ...spot, call: spot.callId })));
  const isFresh = (spot: SpotRow): boolean => freshKeys.has(keyOf(spot.timeMs, spot.receiver, spot.call));
  return findLivePairs(columns, dwells, station.rules)
    .filter(({ spotA, spotB }) => isFresh(spots[spotA]!) || isFresh(spots[spotB]!))
    .slice(0, mostPairs)
    .map(({ spotA, spotB, antennaA, antennaB }) =>
      present(spots[spotA]!, spots[spotB]!, antennaA, antennaB, station.sectorCount),
    );
}

const keyOf = (timeMs: number, receiver: number, call: string): string => `${timeMs} ${receiver} ${call}`;

function present(a: SpotRow, b: SpotRow, antennaA: number, antennaB: number, sectorCount: number): LivePair {
  const { azimuthDeg, spreadDeg } = a;
  const unsure = azimuthDeg === null || spreadDeg === null || sectorUnsure(spreadDeg, sectorCount);
  return {
    at: new Date(Math.max(a.timeMs, b.timeMs)).toISOString(),
    call: a.call,
    country: a.country,
    bandMetres: a.band,
    azimuthDeg,
    sector: unsure ? null : sectorOf(azimuthDeg, sectorCount),
    antennaA,
    antennaB,
    receiverA: a.receiver,
    receiverB: b.receiver,
    snrADb: a.snrDb,
    snrBDb: b.snrDb,
    differenceDb: a.snrDb - b.snrDb,
  };
}

async function readStation(dataSource: DataSource, stationId: number): Promise<StationRow | null> {
  const rows: { block: number; window: number; tolerance: number; guard: number; sectors: number }[] =
    await dataSource.query(
      `SELECT block_minutes AS block, window_seconds AS window, freq_tolerance_100hz AS tolerance,
         guard_seconds AS guard, sector_count AS sectors
       FROM station WHERE id = $1`,
      [stationId],
    );
  const row = rows[0];
  if (row === undefined) return null;
  return {
    rules: {
      blockMinutes: row.block,
      windowSeconds: row.window,
      freqToleranceKhz: row.tolerance / 10,
      guardSeconds: row.guard,
    },
    sectorCount: row.sectors,
  };
}

async function readSpots(
  dataSource: DataSource,
  stationId: number,
  fromMs: number,
  toMs: number,
): Promise<SpotRow[]> {
  return dataSource.query(
    `SELECT extract(epoch FROM s.heard_at)::float8 * 1000 + s.heard_ms AS "timeMs", s.receiver_id AS receiver,
       s.call_id AS "callId", c.call, s.band_m AS band, s.freq_100hz AS "freq100Hz", s.snr_db AS "snrDb",
       s.uncertainty_s AS "uncertaintySeconds", b.country, b.azimuth_deg AS "azimuthDeg",
       b.spread_deg AS "spreadDeg"
     FROM spot s
     JOIN call_sign c ON c.id = s.call_id
     LEFT JOIN call_bearing b ON b.station_id = s.station_id AND b.call_id = s.call_id
     WHERE s.station_id = $1 AND s.heard_at BETWEEN $2 AND $3
     ORDER BY s.heard_at DESC LIMIT $4`,
    [stationId, new Date(fromMs), new Date(toMs), mostSpots],
  );
}

async function readDwells(dataSource: DataSource, stationId: number, fromMs: number, toMs: number) {
  const rows: { receiver: number; antenna: number; startMs: number; endMs: number | null }[] =
    await dataSource.query(
      `SELECT receiver_id AS receiver, antenna_id AS antenna,
         extract(epoch FROM starts_at)::float8 * 1000 AS "startMs",
         extract(epoch FROM ends_at)::float8 * 1000 AS "endMs"
       FROM dwell WHERE station_id = $1 AND starts_at <= $3 AND (ends_at IS NULL OR ends_at > $2)`,
      [stationId, new Date(fromMs), new Date(toMs)],
    );
  return dwellColumns(rows.map((row) => ({ ...row, endMs: row.endMs ?? Number.POSITIVE_INFINITY })));
}
