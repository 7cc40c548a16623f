import type { EntityManager } from 'typeorm';
import { UNTAGGED, tagSpots } from '../../../shared/pairing/index.ts';
import { InvalidRequest } from '../../platform/errors.ts';

/** Place in the list of spots, which runs down the unique key: everything below it is still to come. */
export interface SpotPlace {
  second: number;
  receiverId: number;
  callId: number;
  freq100Hz: number;
}

export interface SpotFilter {
  /** Milliseconds since 1970 UTC, half-open; both bounded by the station's own spots. */
  fromMs: number;
  toMs: number;
  bandMetres?: number | undefined;
  receiverId?: number | undefined;
  callId?: number | undefined;
  antennaId?: number | undefined;
  /** As shared/pairing numbers tags. */
  tag?: number | undefined;
}

export interface ScannedRow {
  heard_at: Date;
  heard_ms: number;
  receiver_id: number;
  call_id: number;
  freq_100hz: number;
  import_id: number;
  band_m: number;
  snr_db: number;
  speed_wpm: number | null;
  mode: number;
  uncertainty_s: number;
}

export interface TaggedRow extends ScannedRow {
  timeMs: number;
  tag: number;
  /** Of the dwell that holds the spot; null when there is none. */
  dwell: { antennaId: number; startMs: number; endMs: number } | null;
}

const hourMs = 3_600_000;

/** Everything before an instant: places are whole seconds, so the second that holds it comes too. */
export const placeBefore = (timeMs: number): SpotPlace => ({
  ...{ second: Math.ceil(timeMs / 1000), receiverId: 0, callId: 0, freq100Hz: 0 },
});
export const placeOf = (row: ScannedRow): SpotPlace => ({
  second: row.heard_at.getTime() / 1000,
  receiverId: row.receiver_id,
  callId: row.call_id,
  freq100Hz: row.freq_100hz,
});

export function writeCursor({ second, receiverId, callId, freq100Hz }: SpotPlace): string {
  return [second, receiverId, callId, freq100Hz].join('.');
}
export function readCursor(text: string): SpotPlace {
  const parts = /^(-?\d{1,12})\.(\d{1,10})\.(\d{1,10})\.(\d{1,10})$/.exec(text)?.slice(1).map(Number);
  if (!parts || parts.slice(1).some((part) => part > 2_147_483_647)) {
    const message = 'Pass the `next` of the page before, unchanged.';
    throw new InvalidRequest('Some fields have to change.', [{ path: 'query.after', message }]);
  }
  const [second, receiverId, callId, freq100Hz] = parts as [number, number, number, number];
  return { second, receiverId, callId, freq100Hz };
}

/**
 * The statement that reads the next spots down the unique key (station, second, receiver, call, frequency),
 * which is also the order of the list: backward through the index, month by month, without a sort, and only
 * the months of the range. Receiver and call are conditions on the index too; the band costs a look at the
 * row. Milliseconds are left to the caller: a condition on a sum makes the planner expect next to no rows, and
 * it then reads and sorts whole months. The test of the list holds the plan to all that.
 */
export function scanStatement(
  stationId: number,
  filter: SpotFilter,
  sliceFromMs: number,
  below: SpotPlace,
  limit: number,
): { sql: string; values: unknown[] } {
  const values: unknown[] = [stationId];
  const value = (one: unknown) => `$${values.push(one)}`;
  const instant = (timeMs: number) => `${value(new Date(timeMs).toISOString())}::timestamptz`;
  const second = instant(below.second * 1000);
  const conditions = [
    'station_id = $1',
    `heard_at >= ${instant(Math.floor(sliceFromMs / 1000) * 1000)}`,
    `heard_at <= ${second}`,
    `(heard_at, receiver_id, call_id, freq_100hz) < (${second}, ${value(below.receiverId)}, ${value(below.callId)}, ${value(below.freq100Hz)})`,
  ];
  if (filter.receiverId !== undefined) conditions.push(`receiver_id = ${value(filter.receiverId)}`);
  if (filter.callId !== undefined) conditions.push(`call_id = ${value(filter.callId)}`);
  if (filter.bandMetres !== undefined) conditions.push(`band_m = ${value(filter.bandMetres)}`);
  const sql = `
    SELECT heard_at, heard_ms, receiver_id, call_id, freq_100hz, import_id, band_m, snr_db, speed_wpm, mode, uncertainty_s
    FROM spot WHERE ${conditions.join('\n      AND ')}
    ORDER BY heard_at DESC, receiver_id DESC, call_id DESC, freq_100hz DESC LIMIT ${value(limit)}`;
  return { sql, values };
}

const firstSliceMs = 6 * hourMs;
const mostRowsAtOnce = 16_000;

/**
 * Up to `wanted` spots that pass the filter, newest first from `start` down, and where to go on (null: there
 * are no more).
 *
 * Antenna and tag are derived, so candidates are tagged here, by the function that tags for everything else,
 * and those that do not fit are left out. A rare band, call or tag could mean reading the whole season for
 * one page: it is read in slices of time that grow while little is found, and after `budgetMs` the page ends
 * with what there is and the place reached.
 */
export async function scanSpots(
  manager: EntityManager,
  station: { id: number; guardSeconds: number },
  filter: SpotFilter,
  start: SpotPlace,
  wanted: number,
  budgetMs: number,
): Promise<{ rows: TaggedRow[]; next: SpotPlace | null }> {
  const isDerived = filter.antennaId !== undefined || filter.tag !== undefined;
  const lowestSecond = Math.floor(filter.fromMs / 1000);
  const deadline = performance.now() + budgetMs;
  const rows: TaggedRow[] = [];
  let place = start;
  let sliceMs = firstSliceMs;
  let rowsAtOnce = isDerived ? 4 * (wanted + 1) : wanted + 1;
  let foundSome = false;
  for (;;) {
    if (isDerived && !foundSome) {
      const nearer = await skipBarren(manager, station.id, filter, place);
      if (nearer === null) return { rows, next: null };
      place = nearer;
    }
    if (place.second < lowestSecond) return { rows, next: null };
    const sliceFromMs = Math.max(lowestSecond * 1000, place.second * 1000 - sliceMs);
    const { sql, values } = scanStatement(station.id, filter, sliceFromMs, place, rowsAtOnce);
    const candidates: ScannedRow[] = await manager.query(sql, values);
    const fitting = (await tagRows(manager, station, candidates)).filter(
      (row) =>
        row.timeMs >= filter.fromMs &&
        row.timeMs < filter.toMs &&
        (filter.tag === undefined || row.tag === filter.tag) &&
        (filter.antennaId === undefined || row.dwell?.antennaId === filter.antennaId),
    );
    rows.push(...fitting);
    // One more than wanted tells that there is a next page.
    if (rows.length > wanted) return { rows: rows.slice(0, wanted), next: placeOf(rows[wanted - 1]!) };
    foundSome = fitting.length > 0;
    if (candidates.length === rowsAtOnce) {
      place = placeOf(candidates.at(-1)!);
      rowsAtOnce = Math.min(mostRowsAtOnce, rowsAtOnce * 4);
    } else {
      if (sliceFromMs <= lowestSecond * 1000) return { rows, next: null };
      place = placeBefore(sliceFromMs);
      sliceMs *= 4;
    }
    if (performance.now() > deadline) return { rows, next: place };
  }
}

/**
 * Moves down to where the switch log allows for the wanted antenna, or for spots without a dwell: an antenna
 * of last winter must not be looked for through all of this one. null: nowhere further down.
 */
async function skipBarren(
  manager: EntityManager,
  stationId: number,
  filter: SpotFilter,
  place: SpotPlace,
): Promise<SpotPlace | null> {
  const wantsUntagged = filter.tag === UNTAGGED;
  if (filter.antennaId === undefined && !wantsUntagged) return place;
  if (filter.antennaId !== undefined && wantsUntagged) return null;
  const highMs = (place.second + 1) * 1000;
  const found: { latest: Date | null }[] = await manager.query(
    wantsUntagged ? latestGap : latestOnAntenna,
    wantsUntagged
      ? [stationId, filter.receiverId ?? null, new Date(highMs)]
      : [stationId, filter.receiverId ?? null, new Date(highMs), filter.antennaId],
  );
  const latestMs = found[0]!.latest?.getTime();
  if (latestMs === undefined) return null;
  return latestMs <= place.second * 1000 ? placeBefore(latestMs) : place;
}

/** Dwells of a receiver cannot overlap: the one that started last also ended last. */
const latestOnAntenna = `
  SELECT max(least(coalesce(d.ends_at, $3), $3)) AS latest
  FROM receiver r CROSS JOIN LATERAL (
    SELECT ends_at FROM dwell
    WHERE station_id = $1 AND receiver_id = r.id AND antenna_id = $4 AND starts_at < $3::timestamptz
    ORDER BY starts_at DESC LIMIT 1) AS d
  WHERE r.station_id = $1 AND ($2::int IS NULL OR r.id = $2)`;

/** Gaps lie before each receiver's first dwell, between dwells that do not touch, and after a closed last one. */
const latestGap = `
  WITH log AS (
    SELECT receiver_id, starts_at, ends_at,
      lead(starts_at) OVER (PARTITION BY receiver_id ORDER BY starts_at) AS next_start
    FROM dwell WHERE station_id = $1 AND starts_at < $3::timestamptz
  ), gap_end AS (
    SELECT least(coalesce(next_start, $3), $3) AS at FROM log
    WHERE ends_at < least(coalesce(next_start, $3), $3) AND ($2::int IS NULL OR receiver_id = $2)
    UNION ALL
    SELECT coalesce((SELECT min(starts_at) FROM log WHERE receiver_id = r.id), $3)
    FROM receiver r WHERE r.station_id = $1 AND ($2::int IS NULL OR r.id = $2)
  )
  SELECT max(at) AS latest FROM gap_end`;

/** The rows with their tags, by the switch log as it stands. */
async function tagRows(
  manager: EntityManager,
  station: { id: number; guardSeconds: number },
  rows: readonly ScannedRow[],
): Promise<TaggedRow[]> {
  if (rows.length === 0) return [];
  const timeMs = Float64Array.from(rows, (row) => row.heard_at.getTime() + row.heard_ms);
  const dwells: { receiver_id: number; antenna_id: number; starts_at: Date; ends_at: Date | null }[] =
    await manager.query(
      `SELECT receiver_id, antenna_id, starts_at, ends_at FROM dwell
       WHERE station_id = $1 AND during && tstzrange($2, $3, '[]')`,
      [station.id, rows.at(-1)!.heard_at, new Date(rows[0]!.heard_at.getTime() + 1000)],
    );
  const columns = {
    receiver: Int32Array.from(dwells, (dwell) => dwell.receiver_id),
    antenna: Int32Array.from(dwells, (dwell) => dwell.antenna_id),
    startMs: Float64Array.from(dwells, (dwell) => dwell.starts_at.getTime()),
    endMs: Float64Array.from(dwells, (dwell) => dwell.ends_at?.getTime() ?? Infinity),
  };
  const spots = {
    timeMs,
    receiver: Int32Array.from(rows, (row) => row.receiver_id),
    uncertaintySeconds: Uint8Array.from(rows, (row) => row.uncertainty_s),
  };
  const { tag, dwell } = tagSpots(spots, columns, station.guardSeconds);
  return rows.map((row, i) => {
    const at = dwell[i]!;
    const [antennaId, startMs, endMs] = [columns.antenna[at]!, columns.startMs[at]!, columns.endMs[at]!];
    return { ...row, timeMs: timeMs[i]!, tag: tag[i]!, dwell: at < 0 ? null : { antennaId, startMs, endMs } };
  });
}
