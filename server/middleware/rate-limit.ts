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
    /** Counts one call of a public route against the caller's address. */
    async count(name: RateLimitName, req: Request): Promise<void> {
      const limiter = byName.get(name);
      if (limiter) await spend(limiter, callerOf(req));
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

/** IPv6 callers own a whole /64: count by it, or the limit could be walked round address by address. */
function callerOf(req: Request): string {
  const ip = req.ip ?? 'unknown';
  return ip.includes(':') && !ip.startsWith('::ffff:') ? ip.split(':').slice(0, 4).join(':') : ip;
}
