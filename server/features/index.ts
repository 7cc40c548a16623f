import type { Deps } from '../platform/deps.ts';
import type { Route } from '../platform/route.ts';
import { auditRoutes } from './audit/audit.routes.ts';
import { authRoutes } from './auth/auth.routes.ts';
import { profileRoutes } from './auth/profile.routes.ts';
import { comparisonRoutes } from './comparisons/comparison.routes.ts';
import { createComparisonService } from './comparisons/comparison.service.ts';
import { dwellRoutes } from './dwells/dwell.routes.ts';
import { eventRoutes } from './events/event.routes.ts';
import { findingRoutes } from './findings/finding.routes.ts';
import { healthRoutes } from './health/health.routes.ts';
import { importRoutes } from './imports/import.routes.ts';
import { jobRoutes } from './jobs/job.routes.ts';
import { ladderRoutes } from './ladder/ladder.routes.ts';
import { memberRoutes } from './members/member.routes.ts';
import { spotRoutes } from './spots/spot.routes.ts';
import { stationRoutes } from './station/station.routes.ts';
import { tokenRoutes } from './tokens/token.routes.ts';
import { tonightRoutes } from './tonight/tonight.routes.ts';
import { trialRoutes } from './trials/trial.routes.ts';

/** Every route of the API. What is not in this list does not exist; tests walk it. */
export function apiRoutes(deps: Deps): Route[] {
  return [
    ...healthRoutes(deps),
    ...authRoutes(deps),
    ...profileRoutes(deps),
    ...stationRoutes(deps),
    ...memberRoutes(deps),
    ...tokenRoutes(deps),
    ...auditRoutes(deps),
    ...dwellRoutes(deps),
    ...spotRoutes(deps),
    ...comparisonRoutes(deps),
    ...ladderRoutes(deps),
    ...tonightRoutes(deps),
    ...trialRoutes(deps),
    ...findingRoutes(deps, createComparisonService(deps).prepare),
    ...importRoutes(deps),
    ...jobRoutes(deps),
    ...eventRoutes(deps),
  ];
}
