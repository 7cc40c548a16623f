import type { EntityManager } from 'typeorm';
import type { QueryOf } from '../../../shared/contracts/endpoint.ts';
import { modeName } from '../../../shared/contracts/spot-mode.ts';
import type { SpotRow, listSpots } from '../../../shared/contracts/spot.ts';
import { GUARDED, TAGGED, UNTAGGED } from '../../../shared/pairing/index.ts';
import { sectorUnsure } from '../../../shared/radio/geodesic.ts';
import { Antenna } from '../../database/entities/antenna.ts';
import { Receiver } from '../../database/entities/receiver.ts';
import { Station } from '../../database/entities/station.ts';
import { NotFound } from '../../platform/errors.ts';
import { refuseTurnedRange, spotExtent } from './spot-extent.read-model.ts';
import { placeBefore, readCursor, scanSpots, writeCursor } from './spot-scan.ts';
import type { TaggedRow } from './spot-scan.ts';
import { whyTagged } from './spot-why.ts';

const tagNumbers = { tagged: TAGGED, guarded: GUARDED, untagged: UNTAGGED } as const;
const tagNames = new Map<number, SpotRow['tag']>(
  Object.entries(tagNumbers).map(([name, n]) => [n, name as SpotRow['tag']]),
);

/** How long one page may look for spots that fit a filter on what is derived, or on what is rare. */
const pageBudgetMs = 800;

interface Page {
  items: SpotRow[];
  next: string | null;
}
interface BearingRow {
  id: number;
  call: string;
  country: string | null;
  azimuth_deg: number | null;
  distance_km: number | null;
  spread_deg: number | null;
}

/** Throws NotFound for a receiver or an antenna of another station. */
export async function listSpotPage(
  manager: EntityManager,
  stationId: number,
  query: QueryOf<typeof listSpots>,
  budgetMs = pageBudgetMs,
): Promise<Page> {
  const station = await manager.findOneByOrFail(Station, { id: stationId });
  const receivers = await namesOf(manager.findBy(Receiver, { stationId }), (row) => row.callSign);
  const antennas = await namesOf(manager.findBy(Antenna, { stationId }), (row) => row.name);
  const { receiverId, antennaId, bandMetres } = query;
  if (receiverId !== undefined && !receivers.has(receiverId)) throw new NotFound('This receiver');
  if (antennaId !== undefined && !antennas.has(antennaId)) throw new NotFound('This antenna');
  refuseTurnedRange(query.from, query.to);
  const start = query.after === undefined ? null : readCursor(query.after);

  const extent = await spotExtent(manager, stationId);
  const callId = query.call === undefined ? undefined : await findCall(manager, query.call);
  if (!extent || callId === null) return { items: [], next: null };
  const fromMs = Math.max(extent.firstMs, query.from === undefined ? 0 : Date.parse(query.from));
  const toMs = Math.min(extent.lastMs + 1000, query.to === undefined ? Infinity : Date.parse(query.to));
  const { rows, next } = await scanSpots(
    manager,
    station,
    { fromMs, toMs, bandMetres, receiverId, callId, antennaId, tag: query.tag && tagNumbers[query.tag] },
    start ?? placeBefore(toMs),
    query.limit,
    budgetMs,
  );
  const bearings = await readBearings(manager, stationId, rows);
  const gaps = await readGaps(manager, stationId, rows);
  const items = rows.map((row): SpotRow => {
    const { dwell } = row;
    const bearing = bearings.get(row.call_id)!;
    return {
      heardAt: new Date(row.timeMs).toISOString(),
      receiverId: row.receiver_id,
      call: bearing.call,
      bandMetres: row.band_m,
      freqKhz: row.freq_100hz / 10,
      mode: modeName(row.mode),
      snrDb: row.snr_db,
      speedWpm: row.speed_wpm,
      uncertaintySeconds: row.uncertainty_s,
      importId: row.import_id === 0 ? null : row.import_id,
      country: bearing.country,
      azimuthDeg: bearing.azimuth_deg,
      distanceKm: bearing.distance_km,
      // Without an azimuth there is no bearing that could be unsure.
      bearingUnsure:
        bearing.azimuth_deg !== null && sectorUnsure(bearing.spread_deg ?? 360, station.sectorCount),
      tag: tagNames.get(row.tag)!,
      antennaId: dwell?.antennaId ?? null,
      why: whyTagged({
        timeMs: row.timeMs,
        uncertaintySeconds: row.uncertainty_s,
        tag: row.tag,
        guardSeconds: station.guardSeconds,
        receiver: receivers.get(row.receiver_id) ?? `Receiver ${row.receiver_id}`,
        dwell: dwell && { ...dwell, antenna: antennas.get(dwell.antennaId)! },
        gap: gaps.get(gapKey(row)) ?? null,
      }),
    };
  });
  return { items, next: next && writeCursor(next) };
}

async function namesOf<Row extends { id: number }>(
  rows: Promise<Row[]>,
  nameOf: (row: Row) => string,
): Promise<Map<number, string>> {
  return new Map((await rows).map((row) => [row.id, nameOf(row)]));
}

async function findCall(manager: EntityManager, call: string): Promise<number | null> {
  const rows: { id: number }[] = await manager.query('SELECT id FROM call_sign WHERE call = $1', [call]);
  return rows[0]?.id ?? null;
}

async function readBearings(
  manager: EntityManager,
  stationId: number,
  rows: readonly TaggedRow[],
): Promise<Map<number, BearingRow>> {
  const found: BearingRow[] = await manager.query(
    `SELECT c.id, c.call, b.country, b.azimuth_deg, b.distance_km, b.spread_deg
     FROM call_sign c LEFT JOIN call_bearing b ON b.station_id = $1 AND b.call_id = c.id
     WHERE c.id = ANY($2::int[])`,
    [stationId, [...new Set(rows.map((row) => row.call_id))]],
  );
  return new Map(found.map((row) => [row.id, row]));
}

const gapKey = (row: TaggedRow) => `${row.receiver_id} ${row.timeMs}`;

/** Of every spot in no dwell, the gap of its receiver's log that it fell into. */
async function readGaps(manager: EntityManager, stationId: number, rows: readonly TaggedRow[]) {
  const lost = rows.filter((row) => row.dwell === null);
  if (lost.length === 0) return new Map<string, { fromMs: number | null; toMs: number | null }>();
  const found: { place: number; ended: Date | null; starts: Date | null }[] = await manager.query(
    `SELECT place,
       (SELECT ends_at FROM dwell WHERE station_id = $1 AND receiver_id = receiver AND starts_at <= t
        ORDER BY starts_at DESC LIMIT 1) AS ended,
       (SELECT starts_at FROM dwell WHERE station_id = $1 AND receiver_id = receiver AND starts_at > t
        ORDER BY starts_at LIMIT 1) AS starts
     FROM unnest($2::int[], $3::timestamptz[]) WITH ORDINALITY AS lost (receiver, t, place)`,
    [stationId, lost.map((row) => row.receiver_id), lost.map((row) => new Date(row.timeMs).toISOString())],
  );
  return new Map(
    found.map(({ place, ended, starts }) => [
      gapKey(lost[place - 1]!),
      { fromMs: ended?.getTime() ?? null, toMs: starts?.getTime() ?? null },
    ]),
  );
}
