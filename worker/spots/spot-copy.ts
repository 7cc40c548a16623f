import { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import type pg from 'pg';
import { from as copyFrom } from 'pg-copy-streams';
import { modeCode } from '../../shared/contracts/spot-mode.ts';
import type { SpotRecord } from './spot-record.ts';

/** The columns of `spot`, in the order in which rows are packed. */
export const spotColumns =
  'heard_at, station_id, receiver_id, call_id, freq_100hz, import_id, heard_ms, band_m, snr_db, speed_wpm, mode, uncertainty_s, feed_minute';

/**
 * Where rows land before doubles are dropped: a table of the session's own, emptied by each commit. It is
 * temporary, so writing it costs no log and a crash leaves nothing behind.
 */
const stagingTable = `
CREATE TEMPORARY TABLE IF NOT EXISTS spot_staging (
  heard_at timestamptz NOT NULL,
  station_id integer NOT NULL,
  receiver_id integer NOT NULL,
  call_id integer NOT NULL,
  freq_100hz integer NOT NULL,
  import_id integer NOT NULL,
  heard_ms smallint NOT NULL,
  band_m smallint NOT NULL,
  snr_db smallint NOT NULL,
  speed_wpm smallint,
  mode smallint NOT NULL,
  uncertainty_s smallint NOT NULL,
  feed_minute smallint
) ON COMMIT DELETE ROWS`;

/** Spots of one station and import, and which of them to copy in which order. */
export interface CopyRows {
  stationId: number;
  importId: number;
  spots: readonly SpotRecord[];
  /** Of every spot. */
  callIds: Int32Array;
  /** Indices of the spots to copy. */
  rows: Int32Array;
}

/** PostgreSQL's binary COPY format: signature, flags, length of the header's extension. */
const header = Buffer.from('PGCOPY\n\xff\r\n\0\0\0\0\0\0\0\0\0', 'latin1');
const trailer = Buffer.from([0xff, 0xff]);
const columnCount = 13;
const rowBytes = 2 + columnCount * 4 + 8 + 5 * 4 + 7 * 2;

/** Small chunks cost a message each: 64 kB and more reach the speed of psql's own COPY. */
const chunkBytes = 256 * 1024;
const rowsInChunk = Math.floor(chunkBytes / rowBytes);

/** Microseconds from 1970 to 2000, where PostgreSQL's clock starts. */
const epochMicros = 946_684_800_000_000;
const high = 2 ** 32;

/** Copies rows into `spot` itself, or into `spot_staging`, which is made when the session has none. */
export async function copySpots(
  client: pg.ClientBase,
  table: 'spot' | 'spot_staging',
  batch: CopyRows,
): Promise<void> {
  if (table === 'spot_staging') await client.query(stagingTable);
  const stream = client.query(copyFrom(`COPY ${table} (${spotColumns}) FROM STDIN (FORMAT binary)`));
  await pipeline(Readable.from(packRows(batch), { objectMode: false }), stream);
}

function* packRows(batch: CopyRows): Generator<Buffer, void, void> {
  const { rows } = batch;
  yield header;
  for (let from = 0; from < rows.length; from += rowsInChunk) {
    const until = Math.min(rows.length, from + rowsInChunk);
    const chunk = Buffer.allocUnsafe((until - from) * rowBytes);
    let at = 0;
    for (let i = from; i < until; i++) at = packRow(chunk, at, batch, rows[i]!);
    yield chunk.subarray(0, at);
  }
  yield trailer;
}

/** Throws a RangeError for a number that does not fit its column. */
function packRow(chunk: Buffer, start: number, batch: CopyRows, row: number): number {
  const spot = batch.spots[row]!;
  const second = Math.floor(spot.heardAtMs / 1000);
  let at = chunk.writeInt16BE(columnCount, start);
  at = chunk.writeInt32BE(8, at);
  const micros = second * 1e6 - epochMicros;
  const highWord = Math.floor(micros / high);
  at = chunk.writeInt32BE(highWord, at);
  at = chunk.writeUInt32BE(micros - highWord * high, at);
  at = packInt4(chunk, at, batch.stationId);
  at = packInt4(chunk, at, spot.receiverId);
  at = packInt4(chunk, at, batch.callIds[row]!);
  at = packInt4(chunk, at, spot.freq100Hz);
  at = packInt4(chunk, at, batch.importId);
  at = packInt2(chunk, at, Math.floor(spot.heardAtMs - second * 1000));
  at = packInt2(chunk, at, spot.bandMetres);
  at = packInt2(chunk, at, spot.snrDb);
  at = packInt2(chunk, at, spot.speedWpm);
  at = packInt2(chunk, at, modeCode(spot.mode));
  at = packInt2(chunk, at, spot.uncertaintySeconds);
  return packInt2(chunk, at, spot.feedMinute);
}

function packInt4(chunk: Buffer, at: number, value: number): number {
  return chunk.writeInt32BE(value, chunk.writeInt32BE(4, at));
}

function packInt2(chunk: Buffer, at: number, value: number | null): number {
  if (value === null) return chunk.writeInt32BE(-1, at);
  return chunk.writeInt16BE(value, chunk.writeInt32BE(2, at));
}
