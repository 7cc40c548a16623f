import type { EntityManager } from 'typeorm';
import type { BodyOf } from '../../../shared/contracts/endpoint.ts';
import type { addPositionOverride } from '../../../shared/contracts/position.ts';
import { parseLocator } from '../../../shared/radio/locator.ts';
import { isRefusal } from '../../../shared/radio/place.ts';
import { PositionOverride } from '../../database/entities/position-override.ts';
import { inTransaction, isUniqueViolation } from '../../database/transaction.ts';
import type { Deps } from '../../platform/deps.ts';
import { Conflict, InvalidRequest, NotFound } from '../../platform/errors.ts';
import { enqueueJob } from '../../platform/job-queue.ts';
import { presentPosition } from './position.read-model.ts';

type Audit = (manager: EntityManager, target: string, detail?: Record<string, unknown>) => Promise<void>;

/** A station's own corrections of where calls are; the worker then computes the bearings anew. */
export function createPositionService(deps: Deps) {
  return {
    async add(
      stationId: number,
      body: BodyOf<typeof addPositionOverride>,
      createdBy: string | null,
      audit: Audit,
    ) {
      const cell = parseLocator(body.locator);
      if (isRefusal(cell)) {
        throw new InvalidRequest('Some fields have to change.', [
          { path: 'body.locator', message: cell.reason },
        ]);
      }
      const { locator } = cell;
      try {
        return await inTransaction(deps.dataSource, async (manager) => {
          const row = await manager.save(
            manager.create(PositionOverride, { stationId, ...body, locator, createdBy }),
          );
          await audit(manager, `${body.matches} ${body.pattern}`, { locator });
          await enqueueJob(manager, stationId, 'bearings', {}, createdBy);
          return presentPosition(row);
        });
      } catch (error) {
        if (!isUniqueViolation(error)) throw error;
        throw new Conflict('Some fields have to change.', [
          { path: 'body.pattern', message: 'There is a correction for this already: withdraw it first.' },
        ]);
      }
    },
    async remove(stationId: number, id: number, audit: Audit): Promise<void> {
      await inTransaction(deps.dataSource, async (manager) => {
        const result = await manager.delete(PositionOverride, { stationId, id });
        if (result.affected !== 1) throw new NotFound('This correction');
        await audit(manager, String(id));
        await enqueueJob(manager, stationId, 'bearings', {});
      });
    },
  };
}
