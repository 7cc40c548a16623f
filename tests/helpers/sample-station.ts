import type { DataSource } from 'typeorm';
import { Antenna } from '../../server/database/entities/antenna.ts';
import { Receiver } from '../../server/database/entities/receiver.ts';
import { Station } from '../../server/database/entities/station.ts';
import { markAllDirty } from '../../server/database/dirty-blocks.ts';
import { writeSpots } from '../../worker/spots/spot-writer.ts';
import type { SpotRecord } from '../../worker/spots/spot-record.ts';
import { makeAllDirtyNights } from '../../worker/units/dirty-nights.ts';
import { loadSampleStation } from '../reference/sample-station/load.ts';

export interface StoredSample {
  stationId: number;
  /** By name: ALPHA, BRAVO, CHARLIE. */
  antennas: Record<string, number>;
  /** By call sign: EI7QSA, ... */
  receivers: Record<string, number>;
}

/**
 * One of the two invented data sets of the sample station in the database: dwells, spots and units, through
 * the worker's own writer and unit maker.
 */
export async function storeSampleStation(
  dataSource: DataSource,
  set: 'swap' | 'alternate',
): Promise<StoredSample> {
  const sample = loadSampleStation(set);
  const { id: stationId } = await dataSource.getRepository(Station).save({
    name: `Sample station, ${set}`,
    callSign: 'EI7QSB',
    locator: 'IO53',
    latitudeDeg: 53.5,
    longitudeDeg: -9,
    timeZone: 'Europe/Dublin',
    ituRegion: 1,
  });
  const antennas: Record<string, number> = {};
  for (const [index, name] of [...sample.antennaIds.keys()].entries()) {
    const marker = String.fromCharCode(65 + index);
    antennas[name] = (
      await dataSource.getRepository(Antenna).save({ stationId, name, marker, kind: 'other' })
    ).id;
  }
  const receivers: Record<string, number> = {};
  for (const callSign of sample.receiverIds.keys()) {
    receivers[callSign] = (
      await dataSource.getRepository(Receiver).save({ stationId, callSign, label: callSign })
    ).id;
  }
  const antennaOf = new Map([...sample.antennaIds].map(([name, id]) => [id, antennas[name]!]));
  const receiverOf = new Map([...sample.receiverIds].map(([name, id]) => [id, receivers[name]!]));

  const { dwells, spots } = sample;
  await dataSource.query(
    `INSERT INTO dwell (station_id, receiver_id, antenna_id, starts_at, ends_at, source)
     SELECT $1, r, a, s, e, 'import' FROM unnest($2::int[], $3::int[], $4::timestamptz[], $5::timestamptz[]) AS t (r, a, s, e)`,
    [
      stationId,
      Array.from(dwells.receiver, (id) => receiverOf.get(id)!),
      Array.from(dwells.antenna, (id) => antennaOf.get(id)!),
      Array.from(dwells.startMs, (ms) => new Date(ms)),
      Array.from(dwells.endMs, (ms) => new Date(ms)),
    ],
  );
  const records = Array.from(spots.timeMs, (heardAtMs, i): SpotRecord => ({
    heardAtMs,
    receiverId: receiverOf.get(spots.receiver[i]!)!,
    call: sample.calls[spots.call[i]! - 1]!,
    freq100Hz: spots.freq100Hz[i]!,
    bandMetres: spots.band[i]!,
    snrDb: spots.snrDb[i]!,
    speedWpm: spots.speedWpm[i]!,
    mode: 'CW',
    uncertaintySeconds: 0,
    feedMinute: null,
  }));
  await writeSpots(dataSource, { stationId, importId: 1, spots: records });
  await markAllDirty(dataSource.manager, stationId);
  await makeAllDirtyNights(dataSource, Date.UTC(2026, 5, 1));
  return { stationId, antennas, receivers };
}
