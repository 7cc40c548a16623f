import * as contract from '../../../shared/contracts/health.ts';
import type { Deps } from '../../platform/deps.ts';
import { Unavailable } from '../../platform/errors.ts';
import { anybody, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';

/** For supervisors. `live` asks nothing of the database, so that its restart does not restart the server. */
export function healthRoutes(deps: Deps): Route[] {
  return [
    route(contract.live, { access: anybody('none') }, async () => ({ status: 'live' as const })),
    route(contract.ready, { access: anybody('none') }, async () => {
      try {
        await deps.dataSource.query('SELECT 1');
      } catch {
        throw new Unavailable();
      }
      return { status: 'ready' as const };
    }),
  ];
}
