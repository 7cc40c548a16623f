import type { DataSource } from 'typeorm';
import type { LivePair } from '../../shared/contracts/tonight.ts';
import { dwellColumns, spotColumns } from '../../shared/pairing/index.ts';
import { findLivePairs } from '../../shared/pairing/live-pairs.ts';
import type { PairingRules } from '../../shared/pairing/rules.ts';
import { sectorOf, sectorUnsure } from '../../shared/radio/geodesic.ts';

/** A screen shows the newest; a flood of spots must not hold up the database. */
const mostSpots = 5_000;

interface StationRow {
  rules: PairingRules;
  sectorCount: number;
}

export interface PairedSpot {
  timeMs: number;
  receiver: number;
  call: string;
}

interface SpotRow extends PairedSpot {
  callId: number;
  band: number;
  freq100Hz: number;
  snrDb: number;
  uncertaintySeconds: number;
  country: string | null;
  azimuthDeg: number | null;
  spreadDeg: number | null;
}

/**
 * Stations that two receivers on two antennas heard together between two instants, newest first. From the
 * stored spots, so that the worker (which tells of new ones) and the server (which shows those of the last
 * minutes) see the same pairs. `wanted` narrows to pairs of which at least one spot fits.
 */
export async function readRecentPairs(
  dataSource: DataSource,
  stationId: number,
  range: { fromMs: number; toMs: number; limit: number; wanted?: (spot: PairedSpot) => boolean },
): Promise<LivePair[]> {
  const station = await readStation(dataSource, stationId);
  if (station === null) return [];
  const reachMs = station.rules.windowSeconds * 2000;
  const [fromMs, toMs] = [range.fromMs - reachMs, range.toMs + reachMs];
  const spots = await readSpots(dataSource, stationId, fromMs, toMs);
  const dwells = await readDwells(dataSource, stationId, fromMs, toMs);
  const columns = spotColumns(spots.map((spot) => ({ ...spot, call: spot.callId })));
  const wanted = range.wanted ?? ((spot) => spot.timeMs >= range.fromMs && spot.timeMs <= range.toMs);
  return findLivePairs(columns, dwells, station.rules)
    .filter(({ spotA, spotB }) => wanted(spots[spotA]!) || wanted(spots[spotB]!))
    .slice(0, range.limit)
    .map(({ spotA, spotB, antennaA, antennaB }) =>
      present(spots[spotA]!, spots[spotB]!, antennaA, antennaB, station.sectorCount),
    );
}

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
