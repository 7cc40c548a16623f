import { IsNull } from 'typeorm';
import type { EntityManager } from 'typeorm';
import type { SignedIn } from '../../../shared/contracts/auth.ts';

import { Invitation } from '../../database/entities/invitation.ts';
import { Membership } from '../../database/entities/membership.ts';
import { PasswordReset } from '../../database/entities/password-reset.ts';
import { Station } from '../../database/entities/station.ts';
import { inTransaction, isUniqueViolation } from '../../database/transaction.ts';
import { accessTokenSeconds, signAccessToken } from '../../middleware/authenticate.ts';
import type { Deps } from '../../platform/deps.ts';
import { Conflict, InvalidRequest, NotFound, NotSignedIn } from '../../platform/errors.ts';
import { hashPassword, verifyNothing, verifyPassword } from '../../platform/password.ts';
import { hashSecret, makeSecret } from '../../platform/secret.ts';
import { stationPlace } from '../../platform/station-place.ts';
import { readProfile } from './profile.read-model.ts';
import { sessionRepository } from './session.repository.ts';
import { userRepository } from './user.repository.ts';

/** What a successful sign-in hands out: the reply, and the refresh token for the cookie. */
export interface Entry {
  reply: SignedIn;
  refreshToken: string;
}
/** Writes to the audit trail inside the given transaction. */
type Audit = (manager: EntityManager, target: string, detail?: Record<string, unknown>) => Promise<void>;

export const resetMinutes = 60;

export function createAuthService(deps: Deps) {
  const { dataSource } = deps;

  async function enter(manager: EntityManager, userId: string, userAgent: string): Promise<Entry> {
    const session = await sessionRepository.open(manager, userId, userAgent);
    return entryFor(manager, userId, session.sessionId, session.token);
  }

  async function entryFor(
    manager: EntityManager,
    userId: string,
    sessionId: string,
    token: string,
  ): Promise<Entry> {
    return {
      refreshToken: token,
      reply: {
        accessToken: signAccessToken(deps.config.jwtSecret, userId, sessionId),
        expiresAt: new Date(Date.now() + accessTokenSeconds * 1000).toISOString(),
        profile: await readProfile(manager, userId),
      },
    };
  }

  return {
    async signIn(email: string, password: string, userAgent: string, audit: Audit): Promise<Entry> {
      const user = await userRepository.byEmail(dataSource.manager, email);
      const usable = user && !user.disabledAt ? user : null;
      const ok = usable ? await verifyPassword(usable.passwordHash, password) : await verifyNothing(password);
      if (!usable || !ok)
        throw new NotSignedIn('E-mail address or password is not right.', 'wrong-credentials');
      return inTransaction(dataSource, async (manager) => {
        await audit(manager, usable.id);
        return enter(manager, usable.id, userAgent);
      });
    },

    async refresh(token: string, audit: Audit): Promise<Entry> {
      // The revocation of a reused token must be committed, so the refusal is thrown after the transaction.
      const outcome = await inTransaction(dataSource, async (manager) => {
        const rotation = await sessionRepository.rotate(manager, token);
        if (rotation.kind === 'reused')
          await audit(manager, rotation.userId, { reason: 'refresh token used twice' });
        if (rotation.kind !== 'rotated') return rotation;
        return entryFor(manager, rotation.userId, rotation.sessionId, rotation.token);
      });
      if ('reply' in outcome) return outcome;
      if (outcome.kind === 'raced') {
        throw new Conflict('Another tab asked at the same moment. Try again.', [], 'refresh-raced');
      }
      throw new NotSignedIn('This session has ended. Sign in again.', 'session-ended');
    },

    async signOut(token: string | null): Promise<void> {
      if (!token) return;
      await inTransaction(dataSource, async (manager) => {
        await sessionRepository.endByToken(manager, token, 'signed out');
      });
    },

    /** Does the same visible thing for a known and an unknown address, in about the same time. */
    async askPasswordReset(email: string, audit: Audit): Promise<void> {
      const user = await userRepository.byEmail(dataSource.manager, email);
      const token = makeSecret();
      await inTransaction(dataSource, async (manager) => {
        await audit(manager, user?.id ?? 'unknown address');
        if (!user || user.disabledAt) return;
        const expiresAt = new Date(Date.now() + resetMinutes * 60_000);
        await manager.insert(PasswordReset, { tokenHash: hashSecret(token), userId: user.id, expiresAt });
      });
      if (!user || user.disabledAt) return;
      deps.mailer.send({
        to: user.email,
        subject: 'Set a new password',
        text:
          `Somebody, probably you, asked for a new password for ${user.email}.\n\n` +
          `${deps.config.publicUrl}/password-reset#${token}\n\n` +
          `The link works once, for ${resetMinutes} minutes. If it was not you, nothing has to be done.\n`,
      });
    },

    async resetPassword(token: string, password: string, audit: Audit): Promise<void> {
      const passwordHash = await hashPassword(password);
      await inTransaction(dataSource, async (manager) => {
        const reset = await manager.findOne(PasswordReset, {
          where: { tokenHash: hashSecret(token) },
          lock: { mode: 'pessimistic_write' },
        });
        if (!reset || reset.usedAt || reset.expiresAt.getTime() <= Date.now()) {
          throw new InvalidRequest(
            'This link has been used or has expired. Ask for a new one.',
            [],
            'link-spent',
          );
        }
        await setPassword(manager, reset.userId, passwordHash, 'password reset');
        await audit(manager, reset.userId);
      });
    },

    async readInvitation(token: string) {
      const invitation = await openInvitation(dataSource.manager, token);
      const station = await dataSource.manager.findOneByOrFail(Station, { id: invitation.stationId });
      const known = await userRepository.byEmail(dataSource.manager, invitation.email);
      return {
        stationName: station.name,
        email: invitation.email,
        role: invitation.role,
        expiresAt: invitation.expiresAt.toISOString(),
        hasAccount: known !== null,
      };
    },

    /** A known person proves themselves by password; a new one gets an account. Used up in the same transaction. */
    async acceptInvitation(
      given: { token: string; name?: string; password: string },
      userAgent: string,
      audit: (
        manager: EntityManager,
        target: string,
        detail: Record<string, unknown>,
        stationId: number,
      ) => Promise<void>,
    ): Promise<Entry> {
      const before = await openInvitation(dataSource.manager, given.token);
      const known = await userRepository.byEmail(dataSource.manager, before.email);
      if (known && (known.disabledAt || !(await verifyPassword(known.passwordHash, given.password)))) {
        throw new NotSignedIn(
          'This address has an account already; its password is not right.',
          'wrong-credentials',
        );
      }
      if (!known && given.password.length < 12) {
        throw new InvalidRequest('Some fields have to change.', [
          { path: 'body.password', message: 'Use at least 12 characters.' },
        ]);
      }
      if (!known && !given.name) {
        throw new InvalidRequest('Some fields have to change.', [
          { path: 'body.name', message: 'Give your name.' },
        ]);
      }
      const passwordHash = known ? '' : await hashPassword(given.password);
      const joining = inTransaction(dataSource, async (manager) => {
        const invitation = await openInvitation(manager, given.token, true);
        const user =
          known ??
          (await userRepository.add(manager, {
            email: invitation.email,
            name: given.name ?? '',
            passwordHash,
          }));
        const already = await manager.findOneBy(Membership, {
          stationId: invitation.stationId,
          userId: user.id,
        });
        if (already) throw new Conflict('You are a member of this station already.');
        await manager.insert(Membership, {
          stationId: invitation.stationId,
          userId: user.id,
          role: invitation.role,
        });
        await manager.update(
          Invitation,
          { stationId: invitation.stationId, id: invitation.id },
          { acceptedAt: new Date() },
        );
        await audit(manager, user.id, { role: invitation.role }, invitation.stationId);
        return enter(manager, user.id, userAgent);
      });
      try {
        return await joining;
      } catch (error) {
        // Two stations invited the same new person, who accepted both at once.
        if (!isUniqueViolation(error)) throw error;
        throw new Conflict('Your account has just been made. Open the link again and give its password.');
      }
    },

    /** The first person of a fresh installation; refused as soon as any account exists. */
    async setUp(
      given: {
        token: string;
        email: string;
        name: string;
        password: string;
        station: { name: string; callSign: string; locator: string };
      },
      userAgent: string,
      audit: (
        manager: EntityManager,
        target: string,
        detail: Record<string, unknown>,
        stationId: number,
      ) => Promise<void>,
    ): Promise<Entry> {
      const wanted = deps.config.setUpToken;
      if (!wanted || !hashSecret(wanted).equals(hashSecret(given.token)))
        throw new NotFound('This set-up link');
      const place = stationPlace(given.station.locator);
      if ('reason' in place) {
        throw new InvalidRequest('Some fields have to change.', [
          { path: 'body.station.locator', message: place.reason },
        ]);
      }
      const passwordHash = await hashPassword(given.password);
      return inTransaction(dataSource, async (manager) => {
        await manager.query('LOCK TABLE app_user IN EXCLUSIVE MODE');
        const [{ n }] = (await manager.query('SELECT count(*)::int AS n FROM app_user')) as [{ n: number }];
        if (n > 0)
          throw new Conflict(
            'This installation is set up already. Sign in, or ask its manager for an invitation.',
          );
        const user = await userRepository.add(manager, {
          email: given.email,
          name: given.name,
          passwordHash,
        });
        const station = await manager.save(
          manager.create(Station, {
            name: given.station.name,
            callSign: given.station.callSign.toUpperCase(),
            ...place,
          }),
        );
        await manager.insert(Membership, { stationId: station.id, userId: user.id, role: 'manager' });
        await audit(manager, user.id, {}, station.id);
        return enter(manager, user.id, userAgent);
      });
    },

    async changePassword(
      who: { userId: string; sessionId: string },
      given: { current: string; next: string },
      userAgent: string,
      audit: Audit,
    ): Promise<Entry> {
      const user = await userRepository.byId(dataSource.manager, who.userId);
      if (!user || !(await verifyPassword(user.passwordHash, given.current))) {
        throw new InvalidRequest('Some fields have to change.', [
          { path: 'body.current', message: 'This is not your present password.' },
        ]);
      }
      const passwordHash = await hashPassword(given.next);
      return inTransaction(dataSource, async (manager) => {
        await setPassword(manager, user.id, passwordHash, 'password changed');
        await audit(manager, user.id);
        return enter(manager, user.id, userAgent);
      });
    },
  };
}

/** With the old password go the sessions that it opened, and every reset link that is still about. */
async function setPassword(
  manager: EntityManager,
  userId: string,
  passwordHash: string,
  reason: string,
): Promise<void> {
  await userRepository.setPassword(manager, userId, passwordHash);
  await manager.update(PasswordReset, { userId, usedAt: IsNull() }, { usedAt: new Date() });
  await sessionRepository.revoke(manager, { userId }, reason);
}

async function openInvitation(manager: EntityManager, token: string, lock = false): Promise<Invitation> {
  const invitation = await manager.findOne(Invitation, {
    where: { tokenHash: hashSecret(token) },
    ...(lock ? { lock: { mode: 'pessimistic_write' as const } } : {}),
  });
  const isOpen =
    invitation &&
    !invitation.acceptedAt &&
    !invitation.withdrawnAt &&
    invitation.expiresAt.getTime() > Date.now();
  if (!isOpen) {
    throw new InvalidRequest(
      'This invitation has been used, withdrawn or has expired. Ask for a new one.',
      [],
      'link-spent',
    );
  }
  return invitation;
}
