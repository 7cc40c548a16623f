import * as contract from '../../../shared/contracts/dwell.ts';
import type { Deps } from '../../platform/deps.ts';
import { answered, inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { sendCsv } from '../../platform/send-csv.ts';
import { listHistory } from './dwell-history.read-model.ts';
import { dwellCsvHeader, dwellCsvRows, listDwells, listNowOn } from './dwell.read-model.ts';
import { createDwellService } from './dwell.service.ts';
import { readLogBook } from './switch-log.ts';
import { createSwitchService } from './switch.service.ts';

export function dwellRoutes(deps: Deps): Route[] {
  const service = createDwellService(deps);
  const switches = createSwitchService(deps);
  const { manager } = deps.dataSource;
  const read = inStation('dwell:read', 'dwell:read');
  const write = inStation('dwell:write');

  return [
    route(contract.listDwells, { access: read }, async ({ params, query }) =>
      listDwells(manager, params.stationId, query),
    ),
    route(contract.listNowOn, { access: read }, async ({ params }) => ({
      items: await listNowOn(manager, params.stationId, deps.now()),
    })),
    route(
      contract.switchReceiver,
      // The one thing that a switch controller does.
      { access: inStation('dwell:write', 'dwell:write'), audit: 'dwell.switch' },
      async ({ params, body, actor, audit, nothingToAudit }) => {
        const reply = await switches.switchTo(params.stationId, body, actor, audit);
        if (!reply.changed) nothingToAudit();
        return reply;
      },
    ),
    route(contract.previewDwellChanges, { access: write }, async ({ params, body, actor }) =>
      service.preview(params.stationId, body.changes, actor),
    ),
    route(
      contract.applyDwellChanges,
      { access: write, audit: 'dwell.change' },
      async ({ params, body, actor, audit }) => service.apply(params.stationId, body.changes, actor, audit),
    ),
    route(contract.listDwellHistory, { access: read }, async ({ params, query }) => {
      const { names } = await readLogBook(manager, params.stationId);
      return listHistory(manager, params.stationId, names, query.after, query.limit);
    }),
    route(
      contract.undoDwellChange,
      { access: write, audit: 'dwell.undo' },
      async ({ params, actor, audit }) => service.undo(params.stationId, params.batchId, actor, audit),
    ),
    route(contract.exportDwells, { access: read }, async ({ params, query, res }) => {
      const rows = dwellCsvRows(deps.dataSource, params.stationId, query);
      await sendCsv(res, 'switch-log.csv', dwellCsvHeader, rows);
      return answered;
    }),
  ];
}
