import * as contract from '../../../shared/contracts/comparison.ts';
import type { Deps } from '../../platform/deps.ts';
import { Conflict } from '../../platform/errors.ts';
import { answered, inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { sendCsv } from '../../platform/send-csv.ts';
import { createComparisonService } from './comparison.service.ts';
import { createSensitivityService } from './sensitivity.service.ts';
import { unitRows, unitRowsHeader } from './unit-rows.ts';

export function comparisonRoutes(deps: Deps): Route[] {
  const service = createComparisonService(deps);
  const askSensitivity = createSensitivityService(deps);

  return [
    route(
      contract.compare,
      { access: inStation('comparison:read') },
      async ({ params, body, actor, signal, res }) => {
        const answer = await service.answer(params.stationId, body, actor, signal);
        if ('pending' in answer) res.status(202);
        return answer;
      },
    ),
    route(contract.sensitivity, { access: inStation('comparison:read') }, ({ params, body, actor, signal }) =>
      askSensitivity(params.stationId, body.question, body.prepare, actor, signal),
    ),
    route(
      contract.exportUnits,
      { access: inStation('comparison:read') },
      async ({ params, body, actor, res }) => {
        const prepared = await service.prepare(params.stationId, body, actor);
        if ('pending' in prepared) {
          throw new Conflict(
            'The units under these rules are being made. Try again when the answer shows.',
            [],
            'units-pending',
          );
        }
        const { a, b } = prepared.input.antennas;
        await sendCsv(res, `units-${a.name}-${b.name}.csv`, unitRowsHeader, unitRows(prepared.input));
        return answered;
      },
    ),
  ];
}
