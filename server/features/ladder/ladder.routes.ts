import { rankAntennas } from '../../../shared/contracts/ladder.ts';
import type { Deps } from '../../platform/deps.ts';
import { inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { createLadderService } from './ladder.service.ts';

export function ladderRoutes(deps: Deps): Route[] {
  const service = createLadderService(deps);

  return [
    route(
      rankAntennas,
      { access: inStation('comparison:read') },
      async ({ params, body, actor, signal, res }) => {
        const answer = await service.answer(params.stationId, body, actor, signal);
        if ('pending' in answer) res.status(202);
        return answer;
      },
    ),
  ];
}
