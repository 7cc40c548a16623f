import type pg from 'pg';
import type { DataSource, EntityManager } from 'typeorm';
import { markHoursDirty } from '../../server/database/dirty-blocks.ts';
import { inTransaction, isUniqueViolation } from '../../server/database/transaction.ts';
import { publish } from '../../server/platform/notify.ts';
import { ensureBearings } from '../bearings/bearing-store.ts';
import { createCallDictionary, type CallDictionary } from './call-dictionary.ts';
import { distinctSpots, feedMinuteStartMs, feedMinuteToleranceMs, withoutReplays } from './distinct-spots.ts';
import { copySpots, spotColumns, type CopyRows } from './spot-copy.ts';
import type { SpotRecord } from './spot-record.ts';

export interface WriteRequest {
  stationId: number;
  /** 0 for what was heard live. */
  importId: number;
  spots: readonly SpotRecord[];
  /**
   * Written in the same transaction, so that a count and the spots it counts are both there or both not.
   * May run more than once: the transaction starts anew when it loses to another.
   */
  alongside?: (manager: EntityManager, outcome: WriteOutcome) => Promise<void>;
}

export interface WriteOutcome {
  /** Rows that were not there before. */
  stored: number;
  /** Rows equal to one of the same batch or to one stored earlier: `stored + doubled` is the batch. */
  doubled: number;
}

/** What one process remembers of a database. */
interface Memory {
  calls: CallDictionary;
  /** Months whose partition is there, counted from January of year 0. */
  months: Set<number>;
  /** Calls whose bearing is there, by station. */
  placed: Map<number, Set<number>>;
}

const memories = new WeakMap<DataSource, Memory>();

function memoryOf(dataSource: DataSource): Memory {
  let memory = memories.get(dataSource);
  if (memory === undefined) {
    memory = { calls: createCallDictionary(dataSource), months: new Set(), placed: new Map() };
    memories.set(dataSource, memory);
  }
  return memory;
}

/**
 * Stores a batch of spots in one transaction, each at most once, marks the hours whose units they touch
 * and tells the browsers. Everything or nothing: after an error nothing of the batch is stored and the
 * same batch can be written again.
 *
 * Two spots equal in receiver, second, call and frequency are one. Live spots (import 0) are stamped on
 * arrival, and a feed that is connected to again sends its latest lines again, at another second. So a
 * live spot is also a double of a live one equal in receiver, call, frequency and **feed minute**: the
 * same line in the same minute is the same reception. The cost: a second reception of a station on the
 * same 100 Hz within one minute counts once. Skimmers report a station that keeps its frequency again
 * after several minutes only, and pairing needs one spot a burst.
 *
 * A batch of 20,000 to 50,000 rows is fastest. Throws a RangeError for a number that does not fit its
 * column, and what the database says.
 */
export async function writeSpots(dataSource: DataSource, request: WriteRequest): Promise<WriteOutcome> {
  const memory = memoryOf(dataSource);
  try {
    const { spots } = request;
    const callIds = await memory.calls.resolve(spots.map((spot) => spot.call));
    await ensureMonths(dataSource, memory.months, spots);
    const distinct = distinctSpots(spots, callIds);
    const rows = request.importId === 0 ? withoutReplays(spots, callIds, distinct) : distinct;
    const placed = memory.placed.get(request.stationId) ?? new Set<number>();
    const unplaced = [...new Set(callIds)].filter((id) => !placed.has(id));
    const batch = { ...request, callIds, rows, unplaced };
    const outcome = await storeGuarded(dataSource, batch);
    for (const id of unplaced) placed.add(id);
    memory.placed.set(request.stationId, placed);
    return outcome;
  } catch (error) {
    // Maybe the database went away, and it might come back from a backup with other ids.
    memory.calls.forget();
    memory.months.clear();
    memory.placed.clear();
    throw error;
  }
}

/** A request made ready: `rows` are in the order of the table's key. */
interface Batch extends WriteRequest, CopyRows {
  /** Calls that may have no bearing yet. */
  unplaced: number[];
}

type Guard = '' | 'ON CONFLICT DO NOTHING';

async function storeGuarded(dataSource: DataSource, batch: Batch): Promise<WriteOutcome> {
  try {
    return await inTransaction(dataSource, (manager) => storeRows(manager, batch, ''));
  } catch (error) {
    // Another writer stored one of these spots between our look and our insert. A plain insert is twice as
    // fast as one with ON CONFLICT, and this happens to hardly any batch.
    if (!isUniqueViolation(error)) throw error;
    return inTransaction(dataSource, (manager) => storeRows(manager, batch, 'ON CONFLICT DO NOTHING'));
  }
}

async function storeRows(manager: EntityManager, batch: Batch, guard: Guard): Promise<WriteOutcome> {
  const { stationId, spots, rows, unplaced, alongside } = batch;
  const stored = rows.length === 0 ? 0 : await insertRows(manager, batch, guard);
  const outcome = { stored, doubled: spots.length - stored };
  if (unplaced.length > 0) await ensureBearings(manager, stationId, unplaced);
  if (stored > 0) {
    await markHoursDirty(manager, stationId, await touchedHours(manager, stationId, spots, rows));
    await publish(manager, stationId, { type: 'spots', stored });
  }
  await alongside?.(manager, outcome);
  return outcome;
}

/** Returns how many rows were not there before. */
async function insertRows(manager: EntityManager, batch: Batch, guard: Guard): Promise<number> {
  const { stationId, importId, spots, rows } = batch;
  const live = importId === 0;
  if (live) await takeTurn(manager, stationId);
  const client = (await manager.queryRunner!.connect()) as pg.PoolClient;
  const firstAt = new Date(Math.floor(spots[rows[0]!]!.heardAtMs / 1000) * 1000);
  const lastAt = new Date(spots[rows.at(-1)!]!.heardAtMs);
  if (!live && guard === '') {
    const there = await client.query(
      'SELECT 1 FROM spot WHERE station_id = $1 AND heard_at BETWEEN $2 AND $3 LIMIT 1',
      [stationId, firstAt, lastAt],
    );
    if (there.rowCount === 0) {
      // Nothing that could be doubled: a season's first import takes this way, at half the price.
      await copySpots(client, 'spot', batch);
      return rows.length;
    }
  }
  await copySpots(client, 'spot_staging', batch);
  if (live) await client.query(dropReplays, [stationId, ...replayReach(batch)]);
  const inserted = await client.query(insertSpots(guard), [stationId, firstAt, lastAt]);
  return inserted.rowCount ?? 0;
}

/**
 * One live writer of a station at a time, until its commit. The rule about feed minutes has no index that
 * could hold it: two workers (two feeds that carry the same receiver, or one that is thought dead and is
 * not) would each miss what the other is about to store.
 */
async function takeTurn(manager: EntityManager, stationId: number): Promise<void> {
  await manager.query(`SELECT pg_advisory_xact_lock(hashtext('whichwire live spots'), $1)`, [stationId]);
}

/** $1 station, $2 and $3 the first and last second of the batch: they keep other months out. */
function insertSpots(guard: Guard): string {
  return `
INSERT INTO spot (${spotColumns})
SELECT ${spotColumns} FROM spot_staging staged
WHERE NOT EXISTS (
  SELECT FROM spot there
  WHERE there.station_id = $1 AND there.heard_at BETWEEN $2 AND $3
    AND there.heard_at = staged.heard_at AND there.receiver_id = staged.receiver_id
    AND there.call_id = staged.call_id AND there.freq_100hz = staged.freq_100hz)
ORDER BY heard_at, receiver_id, call_id, freq_100hz
${guard}`;
}

/**
 * $1 station, $2 and $3 the reach of the batch's feed minutes. A join and not NOT EXISTS: the database then
 * hashes the few staged rows and not the minutes of stored ones, which at thousands of lines a second are
 * a hundred times as many. Two spots of one feed minute are at most twice the tolerance apart; those of
 * the same minute of another day never are.
 */
const dropReplays = `
DELETE FROM spot_staging staged USING spot live
WHERE live.station_id = $1 AND live.import_id = 0 AND live.heard_at BETWEEN $2 AND $3
  AND live.receiver_id = staged.receiver_id AND live.call_id = staged.call_id
  AND live.freq_100hz = staged.freq_100hz AND live.feed_minute = staged.feed_minute
  AND abs(extract(epoch FROM live.heard_at - staged.heard_at)) <= ${(2 * feedMinuteToleranceMs) / 1000}`;

/** Every live spot lies within the tolerance of the start of its feed minute. */
function replayReach({ spots, rows }: Batch): [Date, Date] {
  let fromMs = Number.POSITIVE_INFINITY;
  let toMs = Number.NEGATIVE_INFINITY;
  for (const row of rows) {
    const { feedMinute, heardAtMs } = spots[row]!;
    const startMs = feedMinute === null ? heardAtMs : feedMinuteStartMs(feedMinute, heardAtMs);
    fromMs = Math.min(fromMs, startMs - feedMinuteToleranceMs - 1000);
    toMs = Math.max(toMs, startMs + feedMinuteToleranceMs);
  }
  return [new Date(fromMs), new Date(toMs)];
}

const hourMs = 3_600_000;

/**
 * Hours whose units the batch may change. A spot near the end of an hour can be matched with one of the
 * next, and can take a match away from a pair further on: that reaches one and a half windows.
 */
async function touchedHours(
  manager: EntityManager,
  stationId: number,
  spots: readonly SpotRecord[],
  rows: Int32Array,
): Promise<Date[]> {
  const stations: { window_seconds: number }[] = await manager.query(
    'SELECT window_seconds FROM station WHERE id = $1',
    [stationId],
  );
  const reachMs = (stations[0]?.window_seconds ?? 0) * 1500;
  const hours = new Set<number>();
  for (const row of rows) {
    const { heardAtMs } = spots[row]!;
    hours.add(Math.floor((heardAtMs - reachMs) / hourMs));
    hours.add(Math.floor((heardAtMs + reachMs) / hourMs));
  }
  return [...hours].map((hour) => new Date(hour * hourMs));
}

/** Makes the partitions of the batch's own months: a single wrong year must not make those between too. */
async function ensureMonths(
  dataSource: DataSource,
  months: Set<number>,
  spots: readonly SpotRecord[],
): Promise<void> {
  const missing = new Map<number, Date>();
  let lastHour = Number.NaN;
  for (const { heardAtMs } of spots) {
    const hour = Math.floor(heardAtMs / hourMs);
    if (hour === lastHour) continue;
    lastHour = hour;
    const heardAt = new Date(heardAtMs);
    const month = heardAt.getUTCFullYear() * 12 + heardAt.getUTCMonth();
    if (!months.has(month)) missing.set(month, heardAt);
  }
  for (const [month, heardAt] of missing) {
    await dataSource.query('SELECT ensure_spot_partitions($1, $1)', [heardAt]);
    months.add(month);
  }
}
