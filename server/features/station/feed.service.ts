import type { EntityManager } from 'typeorm';
import type { BodyOf } from '../../../shared/contracts/endpoint.ts';
import type * as contract from '../../../shared/contracts/feed.ts';
import { Feed } from '../../database/entities/feed.ts';
import { FeedHealth } from '../../database/entities/feed-health.ts';
import { inTransaction } from '../../database/transaction.ts';
import type { Deps } from '../../platform/deps.ts';
import { InvalidRequest, NotFound } from '../../platform/errors.ts';
import { wakeWorkers } from '../../platform/notify.ts';
import { isOwnAddress } from '../../platform/own-address.ts';
import { presentFeed } from './station.read-model.ts';

type Audit = (manager: EntityManager, target: string, detail?: Record<string, unknown>) => Promise<void>;

/**
 * Feeds make the worker open connections. Addresses of this machine and of link-local services are refused,
 * so that the form cannot be used to knock at what only the server can reach; the demo's own feed is exempt.
 */
export function createFeedService(deps: Deps) {
  const { dataSource } = deps;

  function checkHost(host: string | undefined): void {
    if (host !== undefined && !deps.config.demo && isOwnAddress(host)) {
      throw new InvalidRequest('Some fields have to change.', [
        {
          path: 'body.host',
          message: "Addresses of the server itself are not accepted; give the feed's own host name.",
        },
      ]);
    }
  }

  return {
    async add(stationId: number, body: BodyOf<typeof contract.addFeed>, audit: Audit) {
      checkHost(body.host);
      return inTransaction(dataSource, async (manager) => {
        const row = await manager.save(manager.create(Feed, { stationId, ...body }));
        await audit(manager, String(row.id), body);
        await wakeWorkers(manager);
        return presentFeed(row, null);
      });
    },
    async update(stationId: number, id: number, body: BodyOf<typeof contract.updateFeed>, audit: Audit) {
      checkHost(body.host);
      return inTransaction(dataSource, async (manager) => {
        const row = await manager.findOneBy(Feed, { stationId, id });
        if (!row) throw new NotFound('This feed');
        await manager.save(Object.assign(row, body));
        await audit(manager, String(id), body);
        await wakeWorkers(manager);
        return presentFeed(row, await manager.findOneBy(FeedHealth, { stationId, feedId: id }));
      });
    },
    async remove(stationId: number, id: number, audit: Audit): Promise<void> {
      await inTransaction(dataSource, async (manager) => {
        const result = await manager.delete(Feed, { stationId, id });
        if (result.affected !== 1) throw new NotFound('This feed');
        await audit(manager, String(id));
        await wakeWorkers(manager);
      });
    },
  };
}
