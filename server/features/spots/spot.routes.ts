import * as contract from '../../../shared/contracts/spot.ts';
import type { Deps } from '../../platform/deps.ts';
import { inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { listSpotPage } from './spot-list.read-model.ts';
import { spotMap } from './spot-map.read-model.ts';
import { spotSummary } from './spot-summary.read-model.ts';

export function spotRoutes(deps: Deps): Route[] {
  const { manager } = deps.dataSource;
  const access = inStation('spot:read', 'spot:read');

  return [
    route(contract.listSpots, { access }, async ({ params, query }) =>
      listSpotPage(manager, params.stationId, query),
    ),
    route(contract.countSpots, { access }, async ({ params }) => spotSummary(manager, params.stationId)),
    route(contract.mapSpots, { access }, async ({ params, query }) =>
      spotMap(manager, params.stationId, query),
    ),
  ];
}
