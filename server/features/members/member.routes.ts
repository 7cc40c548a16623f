import * as contract from '../../../shared/contracts/member.ts';
import type { Deps } from '../../platform/deps.ts';
import { inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { listMembers, listOpenInvitations } from './member.read-model.ts';
import { createMemberService } from './member.service.ts';

export function memberRoutes(deps: Deps): Route[] {
  const service = createMemberService(deps);
  const manage = inStation('member:manage');

  return [
    route(contract.listMembers, { access: inStation('member:read') }, async ({ params }) => ({
      members: await listMembers(deps.dataSource.manager, params.stationId),
      invitations: await listOpenInvitations(deps.dataSource.manager, params.stationId),
    })),
    route(
      contract.inviteMember,
      { access: manage, audit: 'member.invite' },
      async ({ params, body, actor, req, audit }) => {
        await deps.rateLimits.count('invite', req, actor.userId);
        return service.invite(params.stationId, actor.userId, body, audit);
      },
    ),
    route(
      contract.withdrawInvitation,
      { access: manage, audit: 'member.withdraw-invitation' },
      async ({ params, audit }) => service.withdraw(params.stationId, params.invitationId, audit),
    ),
    route(
      contract.changeMemberRole,
      { access: manage, audit: 'member.change-role' },
      async ({ params, body, audit }) =>
        service.changeRole(params.stationId, params.userId, body.role, audit),
    ),
    route(contract.removeMember, { access: manage, audit: 'member.remove' }, async ({ params, audit }) =>
      service.remove(params.stationId, params.userId, audit),
    ),
  ];
}
