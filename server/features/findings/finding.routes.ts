import type { Response } from 'express';
import type { z } from 'zod';
import * as contract from '../../../shared/contracts/finding.ts';
import type { Deps } from '../../platform/deps.ts';
import { NotFound } from '../../platform/errors.ts';
import { answered, anybody, inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { sendCsv } from '../../platform/send-csv.ts';
import { unitRows, unitRowsHeader } from '../comparisons/unit-rows.ts';
import { unpackEvidence } from './evidence-codec.ts';
import { createFindingService } from './finding.service.ts';
import type { AskQuestion } from './finding.service.ts';
import * as read from './finding.read-model.ts';
import { createShareService } from './share.service.ts';

type FindingReply = z.input<typeof contract.finding>;

export function findingRoutes(deps: Deps, ask: AskQuestion): Route[] {
  const service = createFindingService(deps, ask);
  const shares = createShareService(deps);
  const { manager } = deps.dataSource;
  const reads = inStation('finding:read');
  const writes = inStation('finding:write');
  const sharing = inStation('finding:share');

  async function sendPdf(
    res: Response,
    stationId: number,
    finding: FindingReply,
    paper: contract.Paper,
    signal: AbortSignal,
  ): Promise<void> {
    const pictures = await read.readPictures(manager, stationId, Number(finding.id));
    const pdf = await deps.heavyWork.run('drawFinding', { finding, pictures: pictures!, paper }, signal);
    res.setHeader('Content-Type', 'application/pdf');
    res.setHeader('Content-Disposition', attachment(`${finding.title}.pdf`));
    res.setHeader('Cache-Control', 'no-store');
    res.end(pdf);
  }

  return [
    route(contract.listFindings, { access: reads }, async ({ params, query }) =>
      read.listFindings(manager, params.stationId, query.after, query.limit),
    ),
    route(
      contract.freezeFinding,
      { access: writes, audit: 'finding.freeze' },
      async ({ params, body, actor, signal, audit, nothingToAudit, res }) => {
        const frozen = await service.freeze(params.stationId, body, actor, audit, signal);
        if (typeof frozen === 'number') return service.found(params.stationId, frozen);
        nothingToAudit();
        res.status(202);
        return frozen;
      },
    ),
    route(contract.readFinding, { access: reads }, async ({ params }) =>
      service.found(params.stationId, params.findingId),
    ),
    route(contract.recomputeFinding, { access: reads }, async ({ params, actor, signal, res }) => {
      const reply = await service.recompute(params.stationId, params.findingId, actor, signal);
      if ('pending' in reply) res.status(202);
      return reply;
    }),
    route(
      contract.addDecision,
      { access: writes, audit: 'finding.decide' },
      async ({ params, body, actor, audit }) =>
        service.decide(params.stationId, params.findingId, body, actor, audit),
    ),
    route(contract.listShares, { access: sharing }, async ({ params }) => ({
      items: await shares.list(params.stationId, params.findingId),
    })),
    route(
      contract.createShare,
      { access: sharing, audit: 'finding.share' },
      async ({ params, body, actor, req, audit }) => {
        await deps.rateLimits.count('make-token', req, actor.userId);
        return shares.create(params.stationId, params.findingId, body, actor, audit);
      },
    ),
    route(
      contract.withdrawShare,
      { access: sharing, audit: 'finding.withdraw-share' },
      async ({ params, audit }) => shares.withdraw(params.stationId, params.findingId, params.shareId, audit),
    ),
    route(contract.findingPdf, { access: reads }, async ({ params, query, signal, res }) => {
      const finding = await service.found(params.stationId, params.findingId);
      await sendPdf(res, params.stationId, finding, query.paper, signal);
      return answered;
    }),
    route(contract.findingUnits, { access: reads }, async ({ params, res }) => {
      const packed = await read.readEvidence(manager, params.stationId, params.findingId);
      if (!packed) throw new NotFound('This finding');
      const { input } = unpackEvidence(packed);
      await sendCsv(res, `finding-${params.findingId}-units.csv`, unitRowsHeader, unitRows(input));
      return answered;
    }),
    route(contract.findingPicture, { access: reads }, async ({ params, res }) => {
      const { stationId, findingId, picture } = params;
      const svg = await read.readPicture(manager, stationId, findingId, picture);
      if (svg === null) throw new NotFound('This picture');
      res.setHeader('Content-Type', 'image/svg+xml; charset=utf-8');
      res.setHeader('Content-Disposition', attachment(`finding-${findingId}-${picture}.svg`));
      res.setHeader('Cache-Control', 'no-store');
      res.end(svg);
      return answered;
    }),

    route(contract.readSharedFinding, { access: anybody('secret-link') }, async ({ body }) => {
      const { stationId, findingId, expiresAt } = await shares.open(body.token);
      const finding = await service.found(stationId, findingId);
      return { ...finding, trial: null, linkExpiresAt: expiresAt.toISOString() };
    }),
    route(contract.sharedFindingPdf, { access: anybody('secret-link') }, async ({ body, signal, res }) => {
      const { stationId, findingId } = await shares.open(body.token);
      const finding = await service.found(stationId, findingId);
      await sendPdf(res, stationId, finding, body.paper, signal);
      return answered;
    }),
  ];
}

/** A download under a name that no header can be broken with. */
function attachment(fileName: string): string {
  return `attachment; filename="${fileName.replace(/[^A-Za-z0-9._-]+/g, '_')}"`;
}
