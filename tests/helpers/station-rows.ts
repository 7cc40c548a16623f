import type { DataSource } from 'typeorm';
import { Antenna } from '../../server/database/entities/antenna.ts';
import { Receiver } from '../../server/database/entities/receiver.ts';
import { Station } from '../../server/database/entities/station.ts';

export interface StationRows {
  stationId: number;
  receiverId: number;
  /** Named North-east and West. */
  antennaIds: [number, number];
}

/** The least a switch log needs: a station with one receiver and two antennas. */
export async function insertStation(dataSource: DataSource): Promise<StationRows> {
  const { id: stationId } = await dataSource.getRepository(Station).save({
    name: 'Corrib Low Band Group',
    callSign: 'EI7QSB',
    locator: 'IO53',
    latitudeDeg: 53.5,
    longitudeDeg: -9,
    timeZone: 'Europe/Dublin',
    ituRegion: 1,
  });
  const receiver = await dataSource
    .getRepository(Receiver)
    .save({ stationId, callSign: 'EI7QSB', label: 'Shed' });
  const antennas = dataSource.getRepository(Antenna);
  const northEast = await antennas.save({
    stationId,
    name: 'North-east',
    marker: 'circle',
    kind: 'long wire',
  });
  const west = await antennas.save({ stationId, name: 'West', marker: 'square', kind: 'loop' });
  return { stationId, receiverId: receiver.id, antennaIds: [northEast.id, west.id] };
}
