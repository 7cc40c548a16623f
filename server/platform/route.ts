import type { Request, Response } from 'express';
import type { EntityManager } from 'typeorm';
import type { z } from 'zod';
import type { BodyOf, Endpoint, ParamsOf, QueryOf } from '../../shared/contracts/endpoint.ts';
import type { Permission, Role, TokenScope } from '../../shared/contracts/permission.ts';

/** Who may call a route. There is no default: a route without one does not compile. */
export type Access =
  | { kind: 'public'; limit: RateLimitName }
  | { kind: 'session' }
  | { kind: 'station'; permission: Permission; tokenScope?: TokenScope };

/** `none`: health checks, which must answer when the counters' database does not. */
export type RateLimitName =
  'none' | 'open' | 'sign-in' | 'mail' | 'secret-link' | 'refresh' | 'invite' | 'make-token';

/** Anybody, within a rate limit. */
export const anybody = (limit: RateLimitName = 'open'): Access => ({ kind: 'public', limit });
/** Whoever is signed in, about their own account. */
export const signedInPerson: Access = { kind: 'session' };
/** A member of the station in the path whose role has the permission; API tokens only where a scope is named. */
export const inStation = (permission: Permission, tokenScope?: TokenScope): Access => ({
  kind: 'station',
  permission,
  tokenScope,
});

export interface Actor {
  userId: string | null;
  sessionId: string | null;
  tokenId: string | null;
  /** Role at the station in the path; null on routes without a station and for tokens. */
  role: Role | null;
}

export interface RouteContext<E extends Endpoint> {
  params: ParamsOf<E>;
  query: QueryOf<E>;
  body: BodyOf<E>;
  actor: Actor;
  requestId: string;
  /** Aborted when the caller goes away. */
  signal: AbortSignal;
  /** Writes to the audit trail, in the caller's own transaction: what is rolled back was never done. */
  audit(
    manager: EntityManager,
    target: string,
    detail?: Record<string, unknown>,
    stationId?: number,
  ): Promise<void>;
  /** In place of `audit`, when the request found everything as it wanted it and changed nothing. */
  nothingToAudit(): void;
  req: Request;
  res: Response;
}

/** What a handler may give back: the reply as the contract takes it in, or nothing when it wrote by itself. */
export type HandlerResult<E extends Endpoint> =
  | Promise<z.input<E['reply']> | typeof answered>
  | (undefined extends z.input<E['reply']> ? Promise<void> : never);

/** Returned by handlers that wrote the response themselves (streams, downloads). */
export const answered = Symbol('answered');

export interface Route<E extends Endpoint = Endpoint> {
  endpoint: E;
  access: Access;
  /** Action name in the audit trail. A route that changes something must have one. */
  audit: string | null;
  handle(context: RouteContext<E>): HandlerResult<E>;
}

/** Joins an endpoint with who may call it, what the audit trail calls it, and what it does. */
export function route<E extends Endpoint>(
  endpoint: E,
  options: { access: Access; audit?: string },
  handle: (context: RouteContext<E>) => HandlerResult<E>,
): Route {
  return { endpoint, access: options.access, audit: options.audit ?? null, handle } as unknown as Route;
}
