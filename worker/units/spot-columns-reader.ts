import type pg from 'pg';
import { to as copyTo } from 'pg-copy-streams';
import type { SpotColumns } from '../../shared/pairing/index.ts';

/** A fixed-width row of the binary COPY below: 2 bytes field count, then 4 bytes length before each field. */
const fieldBytes = [8, 2, 4, 4, 2, 4, 2, 2, 2] as const;
const rowBytes = 2 + fieldBytes.reduce((sum, bytes) => sum + 4 + bytes, 0);
/** Signature, flags and (empty) extension of PostgreSQL's binary COPY format. */
const headerBytes = 19;
const trailerBytes = 2;
/** PostgreSQL counts microseconds from 2000-01-01. */
const postgresEpochMs = Date.UTC(2000, 0, 1);

/**
 * The spots of a station in [from, to) as columns. Binary COPY of fixed-width rows: a night reaches typed
 * arrays without one JavaScript object a spot, which is what makes a season affordable.
 */
export async function readSpotColumns(
  client: pg.ClientBase,
  stationId: number,
  fromMs: number,
  toMs: number,
): Promise<SpotColumns> {
  // COPY takes no parameters: both values are made here, from numbers.
  const station = Math.trunc(stationId);
  const [from, to] = [new Date(fromMs).toISOString(), new Date(toMs).toISOString()];
  const stream = client.query(
    copyTo(
      `COPY (SELECT heard_at, heard_ms, receiver_id, call_id, band_m, freq_100hz, snr_db, uncertainty_s, coalesce(speed_wpm, 0::smallint)
             FROM spot WHERE station_id = ${station} AND heard_at >= '${from}' AND heard_at < '${to}')
       TO STDOUT (FORMAT binary)`,
    ),
  );
  const chunks: Buffer[] = [];
  for await (const chunk of stream) chunks.push(chunk as Buffer);
  return parseRows(Buffer.concat(chunks));
}

function parseRows(bytes: Buffer): SpotColumns {
  const payload = bytes.length - headerBytes - trailerBytes;
  if (payload < 0 || payload % rowBytes !== 0) {
    throw new Error(
      `COPY gave ${bytes.length} bytes, which is no whole number of rows of ${rowBytes} bytes.`,
    );
  }
  const n = payload / rowBytes;
  const columns: SpotColumns = {
    timeMs: new Float64Array(n),
    receiver: new Int32Array(n),
    call: new Int32Array(n),
    band: new Int16Array(n),
    freq100Hz: new Int32Array(n),
    snrDb: new Int16Array(n),
    uncertaintySeconds: new Uint8Array(n),
    speedWpm: new Uint8Array(n),
  };
  let at = headerBytes;
  for (let i = 0; i < n; i++, at += rowBytes) {
    // Two 32-bit halves of the 64-bit time: a BigInt a row would cost more than all the rest.
    const microseconds = bytes.readInt32BE(at + 6) * 4_294_967_296 + bytes.readUInt32BE(at + 10);
    columns.timeMs[i] = postgresEpochMs + microseconds / 1000 + bytes.readInt16BE(at + 18);
    columns.receiver[i] = bytes.readInt32BE(at + 24);
    columns.call[i] = bytes.readInt32BE(at + 32);
    columns.band[i] = bytes.readInt16BE(at + 40);
    columns.freq100Hz[i] = bytes.readInt32BE(at + 46);
    columns.snrDb[i] = bytes.readInt16BE(at + 54);
    columns.uncertaintySeconds[i] = bytes.readInt16BE(at + 60);
    columns.speedWpm[i] = Math.min(255, Math.max(0, bytes.readInt16BE(at + 66)));
  }
  return columns;
}
