import type { EntityManager } from 'typeorm';
import { RefreshToken } from '../../database/entities/refresh-token.ts';
import { Session } from '../../database/entities/session.ts';
import { hashSecret, makeSecret } from '../../platform/secret.ts';

export const sessionDays = 30;
/**
 * Two tabs of one browser may present the same cookie at the same moment (browsers without locks between
 * tabs: plain HTTP on a LAN). The later one gets nothing but the advice to try again with the cookie that
 * the earlier one brought. A thief who is that quick gets nothing either, and the owner's next try, with the
 * cookie that the thief used up, ends the session.
 */
export const simultaneousSeconds = 10;

/**
 * Outcome of presenting a refresh token. `reused`: it was exchanged before, so somebody has a copy.
 * `raced`: it was exchanged a moment ago.
 */
export type Rotation =
  | { kind: 'rotated'; userId: string; sessionId: string; token: string }
  | { kind: 'reused'; userId: string; sessionId: string }
  | { kind: 'raced' }
  | { kind: 'refused' };

/** Sessions and the chain of refresh tokens that belongs to each. */
export const sessionRepository = {
  async open(
    manager: EntityManager,
    userId: string,
    userAgent: string,
  ): Promise<{ sessionId: string; token: string }> {
    const expiresAt = new Date(Date.now() + sessionDays * 86_400_000);
    const session = await manager.save(
      manager.create(Session, { userId, userAgent: userAgent.slice(0, 200), expiresAt }),
    );
    return { sessionId: session.id, token: await addToken(manager, session.id, expiresAt) };
  },

  /** Runs in a transaction: the row lock lets one of two simultaneous exchanges win. */
  async rotate(manager: EntityManager, token: string): Promise<Rotation> {
    const found = await manager.findOne(RefreshToken, {
      where: { tokenHash: hashSecret(token) },
      lock: { mode: 'pessimistic_write' },
    });
    if (!found) return { kind: 'refused' };
    const session = await manager.findOneByOrFail(Session, { id: found.sessionId });
    if (session.revokedAt || session.expiresAt.getTime() <= Date.now()) return { kind: 'refused' };
    if (found.usedAt) {
      if (Date.now() - found.usedAt.getTime() < simultaneousSeconds * 1000) return { kind: 'raced' };
      await this.revoke(manager, { id: session.id }, 'refresh token used twice');
      return { kind: 'reused', userId: session.userId, sessionId: session.id };
    }
    if (found.expiresAt.getTime() <= Date.now()) return { kind: 'refused' };
    await manager.update(RefreshToken, { tokenHash: found.tokenHash }, { usedAt: new Date() });
    await manager.update(Session, { id: session.id }, { lastUsedAt: new Date() });
    return {
      kind: 'rotated',
      userId: session.userId,
      sessionId: session.id,
      token: await addToken(manager, session.id, session.expiresAt),
    };
  },

  /** Ends the session of a refresh token, used or not: whoever holds one may sign out. */
  async endByToken(manager: EntityManager, token: string, reason: string): Promise<void> {
    const found = await manager.findOneBy(RefreshToken, { tokenHash: hashSecret(token) });
    if (found) await this.revoke(manager, { id: found.sessionId }, reason);
  },

  async revoke(
    manager: EntityManager,
    which: { id: string } | { userId: string },
    reason: string,
  ): Promise<void> {
    await manager
      .createQueryBuilder()
      .update(Session)
      .set({ revokedAt: () => 'now()', revokedReason: reason })
      .where(which)
      .andWhere('revoked_at IS NULL')
      .execute();
  },

  async listOpen(manager: EntityManager, userId: string): Promise<Session[]> {
    return manager
      .createQueryBuilder(Session, 's')
      .where('s.user_id = :userId AND s.revoked_at IS NULL AND s.expires_at > now()', { userId })
      .orderBy('s.last_used_at', 'DESC')
      .getMany();
  },

  /** Spent tokens and ended sessions are of no use after a while; called by a timed job. */
  async forgetOld(manager: EntityManager): Promise<void> {
    await manager.query(
      `DELETE FROM session WHERE expires_at < now() - interval '7 days' OR revoked_at < now() - interval '30 days'`,
    );
    await manager.query(`DELETE FROM password_reset WHERE expires_at < now() - interval '7 days'`);
  },
};

async function addToken(manager: EntityManager, sessionId: string, expiresAt: Date): Promise<string> {
  const token = makeSecret();
  await manager.insert(RefreshToken, { tokenHash: hashSecret(token), sessionId, expiresAt });
  return token;
}
