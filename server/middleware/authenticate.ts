import jwt from 'jsonwebtoken';
import type { Request } from 'express';
import type { DataSource } from 'typeorm';
import { may } from '../../shared/contracts/permission.ts';
import type { Role, TokenScope } from '../../shared/contracts/permission.ts';
import { NotAllowed, NotFound, NotSignedIn } from '../platform/errors.ts';
import type { Access, Actor } from '../platform/route.ts';
import { hashSecret } from '../platform/secret.ts';

export const accessTokenSeconds = 600;
export const apiTokenPrefix = 'wwk_';
const issuer = 'whichwire';

export function signAccessToken(secret: string, userId: string, sessionId: string): string {
  return jwt.sign({ sid: sessionId }, secret, {
    algorithm: 'HS256',
    subject: userId,
    issuer,
    expiresIn: accessTokenSeconds,
  });
}

const nobody: Actor = { userId: null, sessionId: null, tokenId: null, role: null };

/**
 * Decides whether a request may go on, and as whom. Every request asks the database about the session and
 * the membership: a revoked session or a changed role takes effect at once, not when the token expires.
 * To who is not a member a station looks as if it did not exist.
 */
export function createAuthenticator(deps: { dataSource: DataSource; jwtSecret: string }) {
  async function person(token: string): Promise<Actor> {
    const { userId, sessionId } = readAccessToken(token, deps.jwtSecret);
    const rows: unknown[] = await deps.dataSource.query(
      `SELECT 1 FROM session s JOIN app_user u ON u.id = s.user_id
       WHERE s.id = $1 AND s.user_id = $2 AND s.revoked_at IS NULL AND s.expires_at > now() AND u.disabled_at IS NULL`,
      [sessionId, userId],
    );
    if (rows.length === 0) throw new NotSignedIn('This session has ended. Sign in again.', 'session-ended');
    return { userId, sessionId, tokenId: null, role: null };
  }

  async function member(token: string, stationId: number): Promise<Actor & { role: Role }> {
    const { userId, sessionId } = readAccessToken(token, deps.jwtSecret);
    const rows: { role: Role | null }[] = await deps.dataSource.query(
      `SELECT m.role FROM session s JOIN app_user u ON u.id = s.user_id
       LEFT JOIN membership m ON m.user_id = u.id AND m.station_id = $3
       WHERE s.id = $1 AND s.user_id = $2 AND s.revoked_at IS NULL AND s.expires_at > now() AND u.disabled_at IS NULL`,
      [sessionId, userId, stationId],
    );
    if (!rows[0]) throw new NotSignedIn('This session has ended. Sign in again.', 'session-ended');
    if (!rows[0].role) throw new NotFound('This station');
    return { userId, sessionId, tokenId: null, role: rows[0].role };
  }

  async function apiToken(secret: string, stationId: number, scope: TokenScope | undefined): Promise<Actor> {
    const rows: { id: string; station_id: number; scopes: TokenScope[] }[] = await deps.dataSource
      .query(
        `UPDATE api_token SET last_used_at = now()
       WHERE token_hash = $1 AND revoked_at IS NULL AND expires_at > now() RETURNING id, station_id, scopes`,
        [hashSecret(secret)],
      )
      .then((result: [{ id: string; station_id: number; scopes: TokenScope[] }[], number]) => result[0]);
    const found = rows[0];
    if (!found) throw new NotSignedIn('This API token is unknown, expired or revoked.', 'token-refused');
    if (found.station_id !== stationId) throw new NotFound('This station');
    if (!scope || !found.scopes.includes(scope))
      throw new NotAllowed('This API token has no scope for this.');
    return { userId: null, sessionId: null, tokenId: found.id, role: null };
  }

  return async function authenticate(req: Request, access: Access): Promise<Actor> {
    if (access.kind === 'public') return nobody;
    const token = bearerToken(req);
    if (access.kind === 'session') {
      if (token.startsWith(apiTokenPrefix)) throw new NotAllowed('API tokens cannot act for a person.');
      return person(token);
    }
    const stationId = Number(req.params.stationId);
    if (!Number.isInteger(stationId) || stationId < 1 || stationId > 2_147_483_647)
      throw new NotFound('This station');
    if (token.startsWith(apiTokenPrefix)) return apiToken(token, stationId, access.tokenScope);
    const actor = await member(token, stationId);
    if (!may(actor.role, access.permission)) throw new NotAllowed();
    return actor;
  };
}

export type Authenticate = ReturnType<typeof createAuthenticator>;

function bearerToken(req: Request): string {
  const match = /^Bearer (\S{1,2000})$/.exec(req.headers.authorization ?? '');
  if (!match?.[1]) throw new NotSignedIn();
  return match[1];
}

function readAccessToken(token: string, secret: string): { userId: string; sessionId: string } {
  try {
    const payload = jwt.verify(token, secret, { algorithms: ['HS256'], issuer });
    if (typeof payload === 'object' && typeof payload.sub === 'string' && typeof payload.sid === 'string') {
      return { userId: payload.sub, sessionId: payload.sid };
    }
  } catch {
    // Expired, forged or garbled: the caller learns only that a fresh one is needed.
  }
  throw new NotSignedIn('The access token has expired or is not valid.', 'token-expired');
}
