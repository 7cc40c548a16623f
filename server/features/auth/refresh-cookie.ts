import { parseCookie, stringifySetCookie } from 'cookie';
import type { Request, Response } from 'express';
import type { Config } from '../../platform/config.ts';
import { sessionDays } from './session.repository.ts';

const name = 'whichwire_refresh';

/**
 * The refresh token's cookie: out of reach of scripts, sent by this site's own pages only (so that no other
 * site can make a browser use it), and only to the sign-in routes.
 */
function cookieFor(config: Config, value: string, maxAgeSeconds: number): string {
  return stringifySetCookie({
    name,
    value,
    httpOnly: true,
    sameSite: 'strict',
    secure: config.publicUrl.startsWith('https:'),
    path: '/api/auth',
    maxAge: maxAgeSeconds,
  });
}

export function setRefreshCookie(res: Response, config: Config, token: string): void {
  res.setHeader('Set-Cookie', cookieFor(config, token, sessionDays * 86_400));
}

export function clearRefreshCookie(res: Response, config: Config): void {
  res.setHeader('Set-Cookie', cookieFor(config, '', 0));
}

export function readRefreshCookie(req: Request): string | null {
  return parseCookie(req.headers.cookie ?? '')[name] || null;
}
