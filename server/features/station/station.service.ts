import type { EntityManager } from 'typeorm';
import type { BodyOf } from '../../../shared/contracts/endpoint.ts';
import type * as antennaContract from '../../../shared/contracts/antenna.ts';
import type * as receiverContract from '../../../shared/contracts/receiver.ts';
import type * as stationContract from '../../../shared/contracts/station.ts';
import { markAllDirty } from '../../database/dirty-blocks.ts';
import { Antenna } from '../../database/entities/antenna.ts';
import { Dwell } from '../../database/entities/dwell.ts';
import { Receiver } from '../../database/entities/receiver.ts';
import { Station } from '../../database/entities/station.ts';
import { inTransaction, isUniqueViolation } from '../../database/transaction.ts';
import type { Deps } from '../../platform/deps.ts';
import { Conflict, InvalidRequest, NotFound } from '../../platform/errors.ts';
import { enqueueJob } from '../../platform/job-queue.ts';
import { publish } from '../../platform/notify.ts';
import { stationPlace } from '../../platform/station-place.ts';
import { presentAntenna, presentReceiver, readStation } from './station.read-model.ts';

type Audit = (manager: EntityManager, target: string, detail?: Record<string, unknown>) => Promise<void>;

export function createStationService(deps: Deps) {
  const { dataSource } = deps;

  /** Turns the database's unique key into a sentence beside the field it is about. */
  async function named<T>(path: string, message: string, work: () => Promise<T>): Promise<T> {
    try {
      return await work();
    } catch (error) {
      if (isUniqueViolation(error)) throw new Conflict('Some fields have to change.', [{ path, message }]);
      throw error;
    }
  }

  return {
    async update(stationId: number, body: BodyOf<typeof stationContract.updateStation>, audit: Audit) {
      return inTransaction(dataSource, async (manager) => {
        const station = await manager.findOne(Station, {
          where: { id: stationId },
          lock: { mode: 'pessimistic_write' },
        });
        if (!station) throw new NotFound('This station');
        const { freqToleranceKhz, locator, timeZone, ituRegion, ...rest } = body;
        const change: Partial<Station> = { ...rest };
        if (freqToleranceKhz !== undefined) change.freqTolerance100hz = Math.round(freqToleranceKhz * 10);
        // The same place again must not undo a time zone or region that the manager has set.
        const place = locator === undefined ? null : placeOrRefuse(locator);
        if (place && place.locator !== station.locator) Object.assign(change, place);
        if (timeZone !== undefined) change.timeZone = knownZone(timeZone);
        if (ituRegion !== undefined) change.ituRegion = ituRegion;
        if (Object.keys(change).length > 0) await manager.update(Station, { id: stationId }, change);
        await audit(manager, String(stationId), body);

        const moved = change.latitudeDeg !== undefined;
        const changed = (key: 'guardSeconds' | 'blockMinutes' | 'windowSeconds' | 'freqTolerance100hz') =>
          change[key] !== undefined && change[key] !== station[key];
        const rulesChanged =
          changed('guardSeconds') ||
          changed('blockMinutes') ||
          changed('windowSeconds') ||
          changed('freqTolerance100hz');
        if (moved) {
          await manager.query('DELETE FROM call_bearing WHERE station_id = $1', [stationId]);
          await enqueueJob(manager, stationId, 'bearings', {});
        }
        // Nights are solar: another longitude moves their edges.
        if (moved || rulesChanged) await markAllDirty(manager, stationId);
        await publish(manager, stationId, { type: 'station' });
        return readStation(manager, stationId);
      });
    },

    async addReceiver(stationId: number, body: BodyOf<typeof receiverContract.addReceiver>, audit: Audit) {
      return named('body.callSign', 'The station has a receiver with this call sign already.', () =>
        inTransaction(dataSource, async (manager) => {
          const row = await manager.save(manager.create(Receiver, { stationId, ...body }));
          await audit(manager, String(row.id), body);
          await publish(manager, stationId, { type: 'station' });
          return presentReceiver(row);
        }),
      );
    },

    async updateReceiver(
      stationId: number,
      id: number,
      body: BodyOf<typeof receiverContract.updateReceiver>,
      audit: Audit,
    ) {
      return named('body.callSign', 'The station has a receiver with this call sign already.', () =>
        inTransaction(dataSource, async (manager) => {
          const row = await manager.findOneBy(Receiver, { stationId, id });
          if (!row) throw new NotFound('This receiver');
          const { retired, ...change } = body;
          const renamed = change.callSign !== undefined && change.callSign !== row.callSign;
          if (renamed && (await hasSpots(manager, stationId, id))) {
            throw new Conflict('Some fields have to change.', [
              {
                path: 'body.callSign',
                message: 'Spots are filed under this call sign: add another receiver and retire this one.',
              },
            ]);
          }
          Object.assign(row, change);
          if (retired !== undefined) row.retiredAt = retired ? (row.retiredAt ?? new Date()) : null;
          await manager.save(row);
          await audit(manager, String(id), body);
          await publish(manager, stationId, { type: 'station' });
          return presentReceiver(row);
        }),
      );
    },

    async addAntenna(stationId: number, body: BodyOf<typeof antennaContract.addAntenna>, audit: Audit) {
      checkService(body.inServiceFrom, body.inServiceTo);
      return named('body.name', 'The station has an antenna with this name already.', () =>
        inTransaction(dataSource, async (manager) => {
          const row = await manager.save(manager.create(Antenna, { stationId, ...body }));
          await audit(manager, String(row.id), { name: body.name });
          await publish(manager, stationId, { type: 'station' });
          return presentAntenna(row);
        }),
      );
    },

    async updateAntenna(
      stationId: number,
      id: number,
      body: BodyOf<typeof antennaContract.updateAntenna>,
      audit: Audit,
    ) {
      return named('body.name', 'The station has an antenna with this name already.', () =>
        inTransaction(dataSource, async (manager) => {
          const row = await manager.findOneBy(Antenna, { stationId, id });
          if (!row) throw new NotFound('This antenna');
          Object.assign(row, body);
          checkService(row.inServiceFrom, row.inServiceTo);
          await manager.save(row);
          await audit(manager, String(id), body);
          await publish(manager, stationId, { type: 'station' });
          return presentAntenna(row);
        }),
      );
    },

    async removeAntenna(stationId: number, id: number, audit: Audit): Promise<void> {
      await inTransaction(dataSource, async (manager) => {
        const row = await manager.findOne(Antenna, {
          where: { stationId, id },
          lock: { mode: 'pessimistic_write' },
        });
        if (!row) throw new NotFound('This antenna');
        if (await manager.existsBy(Dwell, { stationId, antennaId: id })) {
          throw new Conflict(
            'The switch log names this antenna. Give it an end of service instead of removing it.',
          );
        }
        await manager.delete(Antenna, { stationId, id });
        await audit(manager, String(id), { name: row.name });
        await publish(manager, stationId, { type: 'station' });
      });
    },
  };
}

async function hasSpots(manager: EntityManager, stationId: number, receiverId: number): Promise<boolean> {
  const rows: unknown[] = await manager.query(
    'SELECT 1 FROM spot WHERE station_id = $1 AND receiver_id = $2 LIMIT 1',
    [stationId, receiverId],
  );
  return rows.length > 0;
}

function placeOrRefuse(locator: string) {
  const place = stationPlace(locator);
  if ('reason' in place) {
    throw new InvalidRequest('Some fields have to change.', [
      { path: 'body.locator', message: place.reason },
    ]);
  }
  return place;
}

function knownZone(zone: string): string {
  try {
    return new Intl.DateTimeFormat('en', { timeZone: zone }).resolvedOptions().timeZone;
  } catch {
    throw new InvalidRequest('Some fields have to change.', [
      { path: 'body.timeZone', message: 'Give a time zone such as Europe/Dublin.' },
    ]);
  }
}

function checkService(from: string | null | undefined, to: string | null | undefined): void {
  if (from && to && to < from) {
    throw new InvalidRequest('Some fields have to change.', [
      { path: 'body.inServiceTo', message: 'The end of service must not come before its start.' },
    ]);
  }
}
