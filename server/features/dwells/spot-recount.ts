import type { EntityManager } from 'typeorm';
import type pg from 'pg';
import { to as copyTo } from 'pg-copy-streams';
import { tagSpots } from '../../../shared/pairing/index.ts';
import type { DwellColumns, SpotColumns } from '../../../shared/pairing/index.ts';
import type { DwellRecord } from './dwell-record.ts';
import type { Stretch } from './touched-stretches.ts';

export interface TagChanges {
  spotsChangingAntenna: number;
  spotsGainingAntenna: number;
  spotsLosingAntenna: number;
  spotsChangingGuard: number;
}

type SpotTimes = Pick<SpotColumns, 'timeMs' | 'receiver' | 'uncertaintySeconds'>;

/**
 * How many spots of the stretches get another antenna or guard when the dwells `before` become `after`: each
 * spot is tagged under both, by the function that tags for everything else. Only the dwells that change are
 * needed: a spot of any other has no antenna under either, and counts as unchanged.
 *
 * Spots come as binary COPY and are counted as they arrive: memory does not grow with their number.
 * The stretches must be bounded and not overlap.
 */
export async function countTagChanges(
  manager: EntityManager,
  stationId: number,
  stretches: readonly Stretch[],
  before: readonly DwellRecord[],
  after: readonly DwellRecord[],
  guardSeconds: number,
): Promise<TagChanges> {
  const changes = {
    ...{ spotsChangingAntenna: 0, spotsGainingAntenna: 0 },
    ...{ spotsLosingAntenna: 0, spotsChangingGuard: 0 },
  };
  if (stretches.length === 0) return changes;
  const [oldDwells, newDwells] = [columnsOf(before), columnsOf(after)];
  for await (const spots of readSpotTimes(manager, stationId, stretches)) {
    const old = tagSpots(spots, oldDwells, guardSeconds);
    const fresh = tagSpots(spots, newDwells, guardSeconds);
    for (let i = 0; i < spots.timeMs.length; i++) {
      const [from, to] = [old.antenna[i]!, fresh.antenna[i]!];
      if (from !== to) {
        changes.spotsChangingAntenna++;
        if (from === 0) changes.spotsGainingAntenna++;
        if (to === 0) changes.spotsLosingAntenna++;
      } else if (old.tag[i] !== fresh.tag[i]) changes.spotsChangingGuard++;
    }
  }
  return changes;
}

function columnsOf(dwells: readonly DwellRecord[]): DwellColumns {
  return {
    receiver: Int32Array.from(dwells, (dwell) => dwell.receiverId),
    antenna: Int32Array.from(dwells, (dwell) => dwell.antennaId),
    startMs: Float64Array.from(dwells, (dwell) => dwell.startMs),
    endMs: Float64Array.from(dwells, (dwell) => dwell.endMs ?? Infinity),
  };
}

/** PostgreSQL's binary COPY: a header, then of each row the field count and, before each field, its length. */
const headerBytes = 19;
const rowBytes = 2 + 4 * 4 + (8 + 2 + 4 + 2);
const trailerBytes = 2;
/** PostgreSQL counts microseconds from 2000-01-01. */
const postgresEpochMs = Date.UTC(2000, 0, 1);
const batchBytes = 1 << 20;

async function* readSpotTimes(
  manager: EntityManager,
  stationId: number,
  stretches: readonly Stretch[],
): AsyncGenerator<SpotTimes> {
  const client = (await manager.queryRunner!.connect()) as pg.PoolClient;
  // COPY takes no parameters: every value is made here, from numbers. Whole seconds, as heard_at is stored.
  const rows = stretches.map(
    ({ receiverId, fromMs, toMs }) =>
      `(${Math.trunc(receiverId)}, timestamptz '${wholeSecond(fromMs)}', timestamptz '${new Date(toMs).toISOString()}')`,
  );
  const stream = client.query(
    copyTo(
      // OFFSET 0 keeps the planner from joining all spots of the receivers to find a few stretches.
      `COPY (SELECT heard_at, heard_ms, receiver_id, uncertainty_s
             FROM (VALUES ${rows.join(', ')}) AS stretch (receiver, f, u)
             CROSS JOIN LATERAL (
               SELECT heard_at, heard_ms, receiver_id, uncertainty_s FROM spot
               WHERE station_id = ${Math.trunc(stationId)} AND heard_at >= f AND heard_at < u AND receiver_id = receiver
               OFFSET 0) AS heard)
       TO STDOUT (FORMAT binary)`,
    ),
  );
  let waiting: Buffer[] = [];
  let waitingBytes = 0;
  let skip = headerBytes;
  for await (const chunk of stream as AsyncIterable<Buffer>) {
    waiting.push(chunk);
    waitingBytes += chunk.length;
    if (waitingBytes < batchBytes) continue;
    const bytes = Buffer.concat(waiting).subarray(skip);
    skip = 0;
    const whole = bytes.length - (bytes.length % rowBytes);
    yield parseRows(bytes.subarray(0, whole));
    waiting = [bytes.subarray(whole)];
    waitingBytes = bytes.length - whole;
  }
  const rest = Buffer.concat(waiting).subarray(skip);
  const payload = rest.length - trailerBytes;
  if (payload < 0 || payload % rowBytes !== 0)
    throw new Error(`COPY ended with ${rest.length} bytes left over.`);
  yield parseRows(rest.subarray(0, payload));
}

function parseRows(bytes: Buffer): SpotTimes {
  const n = bytes.length / rowBytes;
  const spots = {
    timeMs: new Float64Array(n),
    receiver: new Int32Array(n),
    uncertaintySeconds: new Uint8Array(n),
  };
  for (let i = 0, at = 0; i < n; i++, at += rowBytes) {
    // Two 32-bit halves of the 64-bit time: a BigInt a row would cost more than all the rest.
    const microseconds = bytes.readInt32BE(at + 6) * 4_294_967_296 + bytes.readUInt32BE(at + 10);
    spots.timeMs[i] = postgresEpochMs + microseconds / 1000 + bytes.readInt16BE(at + 18);
    spots.receiver[i] = bytes.readInt32BE(at + 24);
    spots.uncertaintySeconds[i] = bytes.readInt16BE(at + 32);
  }
  return spots;
}

function wholeSecond(timeMs: number): string {
  return new Date(Math.floor(timeMs / 1000) * 1000).toISOString();
}
