import * as antennaContract from '../../../shared/contracts/antenna.ts';
import * as feedContract from '../../../shared/contracts/feed.ts';
import * as positionContract from '../../../shared/contracts/position.ts';
import * as receiverContract from '../../../shared/contracts/receiver.ts';
import * as stationContract from '../../../shared/contracts/station.ts';
import type { Deps } from '../../platform/deps.ts';
import { answered, inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { sendCsv } from '../../platform/send-csv.ts';
import { feedRefusalRows } from './feed-refusal.read-model.ts';
import { createFeedService } from './feed.service.ts';
import { createPositionService } from './position.service.ts';
import { listPositions } from './position.read-model.ts';
import { listAntennas, listFeeds, listReceivers, readStation } from './station.read-model.ts';
import { createStationService } from './station.service.ts';

export function stationRoutes(deps: Deps): Route[] {
  const service = createStationService(deps);
  const feeds = createFeedService(deps);
  const positions = createPositionService(deps);
  const { manager } = deps.dataSource;
  const read = inStation('station:read');
  const manage = inStation('station:manage');

  return [
    route(stationContract.readStation, { access: read }, async ({ params }) =>
      readStation(manager, params.stationId),
    ),
    route(
      stationContract.updateStation,
      { access: manage, audit: 'station.update' },
      async ({ params, body, audit }) => service.update(params.stationId, body, audit),
    ),

    route(receiverContract.listReceivers, { access: read }, async ({ params }) => ({
      items: await listReceivers(manager, params.stationId),
    })),
    route(
      receiverContract.addReceiver,
      { access: manage, audit: 'receiver.add' },
      async ({ params, body, audit }) => service.addReceiver(params.stationId, body, audit),
    ),
    route(
      receiverContract.updateReceiver,
      { access: manage, audit: 'receiver.update' },
      async ({ params, body, audit }) =>
        service.updateReceiver(params.stationId, params.receiverId, body, audit),
    ),

    route(antennaContract.listAntennas, { access: read }, async ({ params }) => ({
      items: await listAntennas(manager, params.stationId),
    })),
    route(
      antennaContract.addAntenna,
      { access: manage, audit: 'antenna.add' },
      async ({ params, body, audit }) => service.addAntenna(params.stationId, body, audit),
    ),
    route(
      antennaContract.updateAntenna,
      { access: manage, audit: 'antenna.update' },
      async ({ params, body, audit }) =>
        service.updateAntenna(params.stationId, params.antennaId, body, audit),
    ),
    route(
      antennaContract.removeAntenna,
      { access: manage, audit: 'antenna.remove' },
      async ({ params, audit }) => service.removeAntenna(params.stationId, params.antennaId, audit),
    ),

    route(feedContract.listFeeds, { access: read }, async ({ params }) => ({
      items: await listFeeds(manager, params.stationId),
    })),
    route(feedContract.addFeed, { access: manage, audit: 'feed.add' }, async ({ params, body, audit }) =>
      feeds.add(params.stationId, body, audit),
    ),
    route(
      feedContract.updateFeed,
      { access: manage, audit: 'feed.update' },
      async ({ params, body, audit }) => feeds.update(params.stationId, params.feedId, body, audit),
    ),
    route(feedContract.removeFeed, { access: manage, audit: 'feed.remove' }, async ({ params, audit }) =>
      feeds.remove(params.stationId, params.feedId, audit),
    ),
    route(
      feedContract.downloadFeedRefusals,
      { access: inStation('import:read') },
      async ({ params, res }) => {
        const rows = await feedRefusalRows(manager, params.stationId, params.feedId);
        await sendCsv(res, `feed-${params.feedId}-refused.csv`, ['received_at', 'reason', 'raw'], rows);
        return answered;
      },
    ),

    route(positionContract.listPositionOverrides, { access: read }, async ({ params }) => ({
      items: await listPositions(manager, params.stationId),
    })),
    route(
      positionContract.addPositionOverride,
      { access: inStation('position:write'), audit: 'position.add' },
      async ({ params, body, actor, audit }) => positions.add(params.stationId, body, actor.userId, audit),
    ),
    route(
      positionContract.removePositionOverride,
      { access: inStation('position:write'), audit: 'position.remove' },
      async ({ params, audit }) => positions.remove(params.stationId, params.positionId, audit),
    ),
  ];
}
