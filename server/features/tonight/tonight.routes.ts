import { readTonight } from '../../../shared/contracts/tonight.ts';
import type { Deps } from '../../platform/deps.ts';
import { NotFound } from '../../platform/errors.ts';
import { inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { findAntenna } from '../units/units.read-model.ts';
import { createTonightService } from './tonight.service.ts';

export function tonightRoutes(deps: Deps): Route[] {
  const service = createTonightService(deps);
  return [
    route(readTonight, { access: inStation('comparison:read') }, async ({ params, query }) => {
      const { stationId } = params;
      if (
        query.inUse !== undefined &&
        !(await findAntenna(deps.dataSource.manager, stationId, query.inUse))
      ) {
        throw new NotFound('This antenna');
      }
      return service.read(stationId, query.inUse);
    }),
  ];
}
