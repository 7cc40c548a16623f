import { listAudit } from '../../../shared/contracts/audit.ts';
import type { Deps } from '../../platform/deps.ts';
import { inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { readAuditPage } from './audit.read-model.ts';

export function auditRoutes(deps: Deps): Route[] {
  return [
    route(listAudit, { access: inStation('audit:read') }, async ({ params, query }) =>
      readAuditPage(deps.dataSource.manager, params.stationId, query.after, query.limit),
    ),
  ];
}
