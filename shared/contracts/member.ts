import { z } from 'zod';
import { endpoint, instant, stationParams, uuid } from './common.ts';
import { role } from './permission.ts';

export const member = z.object({ userId: uuid, name: z.string(), email: z.string(), role, since: instant });
export const invitation = z.object({
  id: uuid,
  email: z.string(),
  role,
  invitedBy: z.string().nullable(),
  createdAt: instant,
  expiresAt: instant,
});
export const listMembers = endpoint({
  method: 'GET',
  path: '/stations/:stationId/members',
  summary: 'Members and open invitations',
  params: stationParams,
  reply: z.object({ members: z.array(member), invitations: z.array(invitation) }),
});
export const inviteMember = endpoint({
  method: 'POST',
  path: '/stations/:stationId/invitations',
  summary: 'Invite a person by e-mail',
  params: stationParams,
  body: z.object({
    email: z.string().trim().toLowerCase().pipe(z.email('Give an e-mail address such as name@example.org.')),
    role,
  }),
  reply: invitation,
  status: 201,
});
export const withdrawInvitation = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/invitations/:invitationId',
  summary: 'Withdraw an open invitation',
  params: stationParams.extend({ invitationId: uuid }),
  status: 204,
});
const memberParams = stationParams.extend({ userId: uuid });
export const changeMemberRole = endpoint({
  method: 'PATCH',
  path: '/stations/:stationId/members/:userId',
  summary: "Change a member's role; ends that person's sessions. The last manager stays manager",
  params: memberParams,
  body: z.object({ role }),
  reply: member,
});
export const removeMember = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/members/:userId',
  summary: 'Remove a member. The last manager stays',
  params: memberParams,
  status: 204,
});
