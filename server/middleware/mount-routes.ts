import type { Request, Response, Router } from 'express';
import type { DataSource, EntityManager } from 'typeorm';
import { noReply } from '../../shared/contracts/common.ts';
import { answered } from '../platform/route.ts';
import type { Actor, Route, RouteContext } from '../platform/route.ts';
import type { Authenticate } from './authenticate.ts';
import type { RateLimits } from './rate-limit.ts';
import { parsePart } from './validate.ts';

export interface MountOptions {
  dataSource: DataSource;
  authenticate: Authenticate;
  rateLimits: RateLimits;
  /** In tests and development every reply is held against its contract; production trusts the tests. */
  checkReplies: boolean;
}

/**
 * The one way a route reaches Express: limit, authenticate, authorise, validate, run, answer. The order
 * matters: who may not call a route learns nothing from its validation.
 */
export function mountRoutes(router: Router, routes: Route[], options: MountOptions): void {
  for (const r of routes) {
    const method = r.endpoint.method.toLowerCase() as 'get' | 'post' | 'put' | 'patch' | 'delete';
    router[method](r.endpoint.path, async (req, res) => {
      if (r.access.kind === 'public') await options.rateLimits.count(r.access.limit, req);
      const actor = await options.authenticate(req, r.access);
      const context = makeContext(r, req, res, actor);
      let reply: unknown;
      try {
        reply = await r.handle(context);
      } catch (error) {
        // Work that was broken off because nobody waits for it any more is no failure.
        if (context.signal.aborted && error instanceof Error && error.name === 'AbortError') return;
        throw error;
      }
      if (r.audit && !context.wasAudited()) {
        throw new Error(
          `${r.endpoint.method} ${r.endpoint.path} declares the audit action ${r.audit} and wrote none.`,
        );
      }
      send(r, res, reply, options.checkReplies);
    });
  }
}

function makeContext(r: Route, req: Request, res: Response, actor: Actor) {
  let audited = false;
  const gone = new AbortController();
  res.once('close', () => {
    if (!res.writableEnded) gone.abort();
  });
  const params = parsePart(r.endpoint.params, req.params, 'path');
  const stationOfPath = (params as { stationId?: number }).stationId ?? null;
  const context: RouteContext<typeof r.endpoint> = {
    params,
    query: parsePart(r.endpoint.query, req.query, 'query'),
    body: r.endpoint.media?.request ? undefined : parsePart(r.endpoint.body, emptyToUndefined(req), 'body'),
    actor,
    requestId: String(req.id ?? ''),
    signal: gone.signal,
    async audit(manager: EntityManager, target, detail = {}, stationId) {
      audited = true;
      await manager.query(
        `INSERT INTO audit_entry (station_id, user_id, token_id, action, target, detail, request_id)
         VALUES ($1, $2, $3, $4, $5, $6, $7)`,
        [
          stationId ?? stationOfPath,
          actor.userId,
          actor.tokenId,
          r.audit,
          target,
          JSON.stringify(detail),
          String(req.id ?? ''),
        ],
      );
    },
    nothingToAudit() {
      audited = true;
    },
    req,
    res,
  };
  return Object.assign(context, { wasAudited: () => audited });
}

/** express.json leaves undefined where there was no body; an empty object is the same to a contract without one. */
function emptyToUndefined(req: Request): unknown {
  const body: unknown = req.body;
  const isEmpty = typeof body === 'object' && body !== null && Object.keys(body).length === 0;
  return isEmpty && req.headers['content-length'] === undefined ? undefined : body;
}

function send(r: Route, res: Response, reply: unknown, check: boolean): void {
  if (reply === answered) return;
  const status = r.endpoint.status ?? (r.endpoint.reply === noReply ? 204 : 200);
  if (res.statusCode === 200) res.status(status);
  res.setHeader('Cache-Control', 'no-store');
  if (status === 204) return void res.end();
  res.json(check ? r.endpoint.reply.parse(reply) : reply);
}
