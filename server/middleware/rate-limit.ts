import type { Request } from 'express';
import type { DataSource } from 'typeorm';
import { RateLimiterPostgres, RateLimiterRes } from 'rate-limiter-flexible';
import { TooMany } from '../platform/errors.ts';
import type { RateLimitName } from '../platform/route.ts';

/**
 * Points per window and caller. Callers are told apart by address, and where an account is at stake by
 * address and account together: whoever hammers at somebody's account from elsewhere must not lock its
 * owner out.
 */
const limits: Record<Exclude<RateLimitName, 'none'>, { points: number; seconds: number }> = {
  open: { points: 600, seconds: 60 },
  'sign-in': { points: 60, seconds: 900 },
  mail: { points: 10, seconds: 3600 },
  'secret-link': { points: 30, seconds: 900 },
  refresh: { points: 300, seconds: 900 },
  invite: { points: 40, seconds: 3600 },
  'make-token': { points: 40, seconds: 3600 },
};
const signInTries = { points: 6, seconds: 900 };

/** The counters live in PostgreSQL: all server processes count together. */
export function createRateLimits(dataSource: DataSource) {
  const make = (keyPrefix: string, limit: { points: number; seconds: number }) =>
    new RateLimiterPostgres({
      storeClient: dataSource,
      storeType: 'typeorm',
      tableName: 'rate_limit',
      tableCreated: true,
      clearExpiredByTimeout: false,
      keyPrefix,
      points: limit.points,
      duration: limit.seconds,
    });
  const byName = new Map(
    Object.entries(limits).map(([name, limit]) => [name as RateLimitName, make(`a:${name}`, limit)]),
  );
  const failedSignIns = make('f', signInTries);

  async function spend(limiter: RateLimiterPostgres, key: string): Promise<void> {
    try {
      await limiter.consume(key);
    } catch (refusal) {
      if (refusal instanceof RateLimiterRes)
        throw new TooMany(Math.max(1, Math.ceil(refusal.msBeforeNext / 1000)));
      throw refusal;
    }
  }

  return {
    /** Counts one call against the caller's address or, of somebody who is signed in, against that person. */
    async count(name: RateLimitName, req: Request, userId?: string | null): Promise<void> {
      const limiter = byName.get(name);
      if (limiter) await spend(limiter, userId ?? callerOf(req));
    },
    /** Called before the password is checked, so that guesses cannot run in parallel past the limit. */
    async countSignIn(req: Request, email: string): Promise<void> {
      await spend(failedSignIns, `${callerOf(req)}|${email}`);
    },
    async forgetSignIns(req: Request, email: string): Promise<void> {
      await failedSignIns.delete(`${callerOf(req)}|${email}`);
    },
  };
}

export type RateLimits = ReturnType<typeof createRateLimits>;

function callerOf(req: Request): string {
  return callerAddress(req.ip ?? 'unknown');
}

/**
 * IPv6 callers own a whole /64: counted by it, or the limit could be walked round address by address. The
 * groups are written out first, because `::` may stand for some of the network's half.
 */
export function callerAddress(ip: string): string {
  const mapped = /^::ffff:(\d+\.\d+\.\d+\.\d+)$/i.exec(ip);
  if (mapped?.[1]) return mapped[1];
  if (!ip.includes(':')) return ip;
  const [head = '', tail] = ip.split('%')[0]!.toLowerCase().split('::');
  const left = head ? head.split(':') : [];
  const right = tail ? tail.split(':') : [];
  const zeros = tail === undefined ? 0 : Math.max(0, 8 - left.length - right.length);
  const groups = [...left, ...Array<string>(zeros).fill('0'), ...right];
  return groups
    .slice(0, 4)
    .map((group) => group.replace(/^0+(?=.)/, ''))
    .join(':');
}
