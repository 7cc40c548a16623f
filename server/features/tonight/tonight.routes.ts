import { readTonight } from '../../../shared/contracts/tonight.ts';
import type { Deps } from '../../platform/deps.ts';
import { inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { createTonightService } from './tonight.service.ts';

export function tonightRoutes(deps: Deps): Route[] {
  const service = createTonightService(deps);
  return [
    route(readTonight, { access: inStation('comparison:read') }, async ({ params, query }) =>
      service.read(params.stationId, query.inUse),
    ),
  ];
}
