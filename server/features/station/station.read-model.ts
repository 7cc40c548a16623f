import type { EntityManager } from 'typeorm';
import type { Antenna as AntennaReply } from '../../../shared/contracts/antenna.ts';
import type { Feed as FeedReply } from '../../../shared/contracts/feed.ts';
import type { Receiver as ReceiverReply } from '../../../shared/contracts/receiver.ts';
import type { Station as StationReply } from '../../../shared/contracts/station.ts';
import { Antenna } from '../../database/entities/antenna.ts';
import { Feed } from '../../database/entities/feed.ts';
import { FeedHealth } from '../../database/entities/feed-health.ts';
import { Receiver } from '../../database/entities/receiver.ts';
import { Station } from '../../database/entities/station.ts';
import { NotFound } from '../../platform/errors.ts';

export async function readStation(manager: EntityManager, stationId: number): Promise<StationReply> {
  const station = await manager.findOneBy(Station, { id: stationId });
  if (!station) throw new NotFound('This station');
  return {
    id: station.id,
    name: station.name,
    callSign: station.callSign,
    locator: station.locator,
    latitudeDeg: station.latitudeDeg,
    longitudeDeg: station.longitudeDeg,
    timeZone: station.timeZone,
    ituRegion: station.ituRegion,
    guardSeconds: station.guardSeconds,
    blockMinutes: station.blockMinutes,
    windowSeconds: station.windowSeconds,
    freqToleranceKhz: station.freqTolerance100hz / 10,
    marginDb: station.marginDb,
    sectorCount: station.sectorCount,
    isDemo: station.isDemo,
  };
}

export async function listReceivers(manager: EntityManager, stationId: number): Promise<ReceiverReply[]> {
  const rows = await manager.find(Receiver, { where: { stationId }, order: { id: 'ASC' } });
  return rows.map(presentReceiver);
}

export function presentReceiver(row: Receiver): ReceiverReply {
  return {
    id: row.id,
    callSign: row.callSign,
    label: row.label,
    notes: row.notes,
    retiredAt: row.retiredAt?.toISOString() ?? null,
  };
}

export async function listAntennas(manager: EntityManager, stationId: number): Promise<AntennaReply[]> {
  const rows = await manager.find(Antenna, { where: { stationId }, order: { marker: 'ASC', id: 'ASC' } });
  return rows.map(presentAntenna);
}

export function presentAntenna(row: Antenna): AntennaReply {
  const {
    id,
    name,
    marker,
    kind,
    headingDeg,
    beamwidthDeg,
    lengthM,
    heightM,
    notes,
    inServiceFrom,
    inServiceTo,
  } = row;
  return {
    id,
    name,
    marker,
    kind,
    headingDeg,
    beamwidthDeg,
    lengthM,
    heightM,
    notes,
    inServiceFrom,
    inServiceTo,
  };
}

export async function listFeeds(manager: EntityManager, stationId: number): Promise<FeedReply[]> {
  const feeds = await manager.find(Feed, { where: { stationId }, order: { id: 'ASC' } });
  const health = new Map((await manager.findBy(FeedHealth, { stationId })).map((row) => [row.feedId, row]));
  return feeds.map((feed) => presentFeed(feed, health.get(feed.id) ?? null));
}

export function presentFeed(feed: Feed, health: FeedHealth | null): FeedReply {
  return {
    id: feed.id,
    name: feed.name,
    host: feed.host,
    port: feed.port,
    loginCall: feed.loginCall,
    enabled: feed.enabled,
    health: health && {
      state: health.state,
      connectedAt: health.connectedAt?.toISOString() ?? null,
      lastLineAt: health.lastLineAt?.toISOString() ?? null,
      linesLastMinute: health.linesLastMinute,
      linesTotal: health.linesTotal,
      storedTotal: health.storedTotal,
      doubledTotal: health.doubledTotal,
      refusedTotal: health.refusedTotal,
      otherReceiverTotal: health.otherReceiverTotal,
      lastError: health.lastError,
      updatedAt: health.updatedAt.toISOString(),
    },
  };
}
