import * as contract from '../../../shared/contracts/auth.ts';
import { inTransaction } from '../../database/transaction.ts';
import type { Deps } from '../../platform/deps.ts';
import { NotFound, NotSignedIn } from '../../platform/errors.ts';
import { route, signedInPerson } from '../../platform/route.ts';
import type { Actor, Route } from '../../platform/route.ts';
import { createAuthService } from './auth.service.ts';
import { readProfile } from './profile.read-model.ts';
import { setRefreshCookie } from './refresh-cookie.ts';
import { sessionRepository } from './session.repository.ts';
import { userRepository } from './user.repository.ts';

function personOf(actor: Actor): { userId: string; sessionId: string } {
  if (!actor.userId || !actor.sessionId) throw new NotSignedIn();
  return { userId: actor.userId, sessionId: actor.sessionId };
}

/** What a person does with their own account. */
export function profileRoutes(deps: Deps): Route[] {
  const service = createAuthService(deps);
  const { dataSource } = deps;

  return [
    route(contract.readProfile, { access: signedInPerson }, async ({ actor }) =>
      readProfile(dataSource.manager, personOf(actor).userId),
    ),
    route(
      contract.updateProfile,
      { access: signedInPerson, audit: 'profile.update' },
      async ({ actor, body, audit }) =>
        inTransaction(dataSource, async (manager) => {
          const { userId } = personOf(actor);
          await userRepository.update(manager, userId, body);
          await audit(manager, userId, { fields: Object.keys(body) });
          return readProfile(manager, userId);
        }),
    ),
    route(
      contract.changePassword,
      { access: signedInPerson, audit: 'profile.change-password' },
      async ({ actor, body, req, res, audit }) => {
        const person = personOf(actor);
        await deps.rateLimits.countSignIn(req, person.userId);
        const entry = await service.changePassword(person, body, req.headers['user-agent'] ?? '', audit);
        await deps.rateLimits.forgetSignIns(req, person.userId);
        setRefreshCookie(res, deps.config, entry.refreshToken);
        return entry.reply;
      },
    ),
    route(contract.listSessions, { access: signedInPerson }, async ({ actor }) => {
      const { userId, sessionId } = personOf(actor);
      const sessions = await sessionRepository.listOpen(dataSource.manager, userId);
      return {
        items: sessions.map((s) => ({
          id: s.id,
          userAgent: s.userAgent,
          createdAt: s.createdAt.toISOString(),
          lastUsedAt: s.lastUsedAt.toISOString(),
          isThis: s.id === sessionId,
        })),
      };
    }),
    route(
      contract.endSession,
      { access: signedInPerson, audit: 'profile.end-session' },
      async ({ actor, params, audit }) =>
        inTransaction(dataSource, async (manager) => {
          const own = await sessionRepository.listOpen(manager, personOf(actor).userId);
          if (!own.some((s) => s.id === params.sessionId)) throw new NotFound('This session');
          await sessionRepository.revoke(manager, { id: params.sessionId }, 'ended by its owner');
          await audit(manager, params.sessionId);
        }),
    ),
  ];
}
