import * as contract from '../../../shared/contracts/auth.ts';
import type { Deps } from '../../platform/deps.ts';
import { NotSignedIn } from '../../platform/errors.ts';
import { anybody, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { createAuthService } from './auth.service.ts';
import type { Entry } from './auth.service.ts';
import { demoAccounts } from '../../platform/demo-accounts.ts';
import { clearRefreshCookie, readRefreshCookie, setRefreshCookie } from './refresh-cookie.ts';

export function authRoutes(deps: Deps): Route[] {
  const service = createAuthService(deps);
  const agentOf = (req: { headers: { 'user-agent'?: string } }) => req.headers['user-agent'] ?? '';
  const admit = (res: Parameters<typeof setRefreshCookie>[0], entry: Entry) => {
    setRefreshCookie(res, deps.config, entry.refreshToken);
    return entry.reply;
  };

  return [
    route(
      contract.signIn,
      { access: anybody('sign-in'), audit: 'auth.sign-in' },
      async ({ body, req, res, audit }) => {
        await deps.rateLimits.countSignIn(req, body.email);
        const entry = await service.signIn(body.email, body.password, agentOf(req), audit);
        await deps.rateLimits.forgetSignIns(req, body.email);
        return admit(res, entry);
      },
    ),
    route(contract.refresh, { access: anybody('refresh') }, async ({ req, res, requestId }) => {
      const token = readRefreshCookie(req);
      if (!token) throw new NotSignedIn();
      try {
        return admit(
          res,
          await service.refresh(token, async (manager, userId, detail) => {
            deps.logger.warn(
              { userId, requestId },
              'a refresh token came back after its use: session revoked',
            );
            await manager.query(
              `INSERT INTO audit_entry (user_id, action, target, detail, request_id)
               VALUES ($1, 'auth.refresh-reuse', $2, $3, $4)`,
              // Twice: the column of the target is text, and PostgreSQL gives one parameter one type.
              [userId, userId, JSON.stringify(detail ?? {}), requestId],
            );
          }),
        );
      } catch (error) {
        if (error instanceof NotSignedIn) clearRefreshCookie(res, deps.config);
        throw error;
      }
    }),
    route(contract.signOut, { access: anybody('refresh') }, async ({ req, res }) => {
      await service.signOut(readRefreshCookie(req));
      clearRefreshCookie(res, deps.config);
    }),
    route(
      contract.askPasswordReset,
      { access: anybody('mail'), audit: 'auth.ask-password-reset' },
      async ({ body, audit }) => service.askPasswordReset(body.email, audit),
    ),
    route(
      contract.resetPassword,
      { access: anybody('secret-link'), audit: 'auth.reset-password' },
      async ({ body, audit }) => service.resetPassword(body.token, body.password, audit),
    ),
    route(contract.readInvitation, { access: anybody('secret-link') }, async ({ body }) =>
      service.readInvitation(body.token),
    ),
    route(
      contract.acceptInvitation,
      { access: anybody('secret-link'), audit: 'member.join' },
      async ({ body, req, res, audit }) =>
        admit(res, await service.acceptInvitation(body, agentOf(req), audit)),
    ),
    route(
      contract.setUp,
      { access: anybody('secret-link'), audit: 'station.set-up' },
      async ({ body, req, res, audit }) => admit(res, await service.setUp(body, agentOf(req), audit)),
    ),
    route(contract.demoAccounts, { access: anybody() }, async () => ({
      accounts: deps.config.demo ? [...demoAccounts] : [],
    })),
    route(contract.demoMail, { access: anybody() }, async () => ({
      messages: (deps.demoMailbox?.messages() ?? []).reverse().map((m) => ({
        at: m.at.toISOString(),
        to: m.to,
        subject: m.subject,
        text: m.text,
        link: /https?:\/\/\S+/.exec(m.text)?.[0] ?? null,
      })),
    })),
  ];
}
