import type { z } from 'zod';
import * as contract from '../../../shared/contracts/token.ts';
import type { TokenScope } from '../../../shared/contracts/permission.ts';
import type { ApiToken } from '../../database/entities/api-token.ts';
import { inTransaction } from '../../database/transaction.ts';
import { apiTokenPrefix } from '../../middleware/authenticate.ts';
import type { Deps } from '../../platform/deps.ts';
import { NotFound } from '../../platform/errors.ts';
import { inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { hashSecret, makeSecret } from '../../platform/secret.ts';
import { tokenRepository } from './token.repository.ts';

export function tokenRoutes(deps: Deps): Route[] {
  const access = inStation('token:manage');

  return [
    route(contract.listTokens, { access }, async ({ params }) => ({
      items: (await tokenRepository.list(deps.dataSource.manager, params.stationId)).map(present),
    })),
    route(
      contract.makeToken,
      { access, audit: 'token.make' },
      async ({ params, body, actor, req, audit }) => {
        await deps.rateLimits.count('make-token', req, actor.userId);
        const secret = makeSecret(apiTokenPrefix);
        return inTransaction(deps.dataSource, async (manager) => {
          const token = await tokenRepository.add(manager, {
            stationId: params.stationId,
            name: body.name,
            scopes: body.scopes,
            tokenHash: hashSecret(secret),
            createdBy: actor.userId,
            expiresAt: new Date(Date.now() + body.days * 86_400_000),
          });
          await audit(manager, token.id, { name: body.name, scopes: body.scopes });
          return { token: present(token), secret };
        });
      },
    ),
    route(contract.revokeToken, { access, audit: 'token.revoke' }, async ({ params, audit }) =>
      inTransaction(deps.dataSource, async (manager) => {
        if (!(await tokenRepository.revoke(manager, params.stationId, params.tokenId)))
          throw new NotFound('This token');
        await audit(manager, params.tokenId);
      }),
    ),
  ];
}

function present(token: ApiToken): z.input<typeof contract.apiToken> {
  return {
    id: token.id,
    name: token.name,
    scopes: token.scopes as TokenScope[],
    createdAt: token.createdAt.toISOString(),
    expiresAt: token.expiresAt.toISOString(),
    lastUsedAt: token.lastUsedAt?.toISOString() ?? null,
    revokedAt: token.revokedAt?.toISOString() ?? null,
  };
}
