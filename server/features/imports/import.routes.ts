import * as contract from '../../../shared/contracts/import.ts';
import type { Deps } from '../../platform/deps.ts';
import { answered, inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { sendCsv } from '../../platform/send-csv.ts';
import { listMappings, readImportPage, readRefusalPage } from './import.read-model.ts';
import { createImportService } from './import.service.ts';

export function importRoutes(deps: Deps): Route[] {
  const { manager } = deps.dataSource;
  const service = createImportService(deps);
  const read = inStation('import:read');
  const write = inStation('import:write');

  return [
    route(contract.listImports, { access: read }, async ({ params, query }) =>
      readImportPage(manager, params.stationId, query.after, query.limit),
    ),
    route(contract.readImport, { access: read }, async ({ params }) =>
      service.found(params.stationId, params.importId),
    ),
    route(
      contract.uploadImport,
      { access: write, audit: 'import.upload' },
      async ({ params, query, actor, req, audit }) =>
        service.upload(params.stationId, query.kind, actor.userId, req, audit),
    ),
    route(contract.previewImport, { access: write }, async ({ params, body }) =>
      service.preview(params.stationId, params.importId, body.mapping),
    ),
    route(
      contract.startImport,
      { access: write, audit: 'import.start' },
      async ({ params, body, actor, audit }) =>
        service.start(params.stationId, params.importId, body.mapping, actor.userId, audit),
    ),
    route(
      contract.cancelImport,
      { access: write, audit: 'import.cancel' },
      async ({ params, actor, audit }) =>
        service.cancel(params.stationId, params.importId, actor.userId, audit),
    ),
    route(contract.undoImport, { access: write, audit: 'import.undo' }, async ({ params, actor, audit }) =>
      service.undo(params.stationId, params.importId, actor.userId, audit),
    ),
    route(contract.listImportRefusals, { access: read }, async ({ params, query }) => {
      await service.found(params.stationId, params.importId);
      return readRefusalPage(manager, params.stationId, params.importId, query.after, query.limit);
    }),
    route(contract.downloadImportRefusals, { access: read }, async ({ params, res }) => {
      const { fileName, header, rows } = await service.refusalTable(params.stationId, params.importId);
      await sendCsv(res, fileName, header, rows);
      return answered;
    }),
    route(contract.listMappings, { access: read }, async ({ params }) => ({
      items: await listMappings(manager, params.stationId),
    })),
    route(
      contract.saveMapping,
      { access: write, audit: 'mapping.save' },
      async ({ params, body, actor, audit }) =>
        service.saveMapping(params.stationId, body, actor.userId, audit),
    ),
    route(contract.removeMapping, { access: write, audit: 'mapping.remove' }, async ({ params, audit }) =>
      service.removeMapping(params.stationId, params.mappingId, audit),
    ),
  ];
}
