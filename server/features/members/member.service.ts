import type { EntityManager } from 'typeorm';
import type { Role } from '../../../shared/contracts/permission.ts';
import { Station } from '../../database/entities/station.ts';
import { inTransaction } from '../../database/transaction.ts';
import type { Deps } from '../../platform/deps.ts';
import { Conflict, NotFound } from '../../platform/errors.ts';
import { hashSecret, makeSecret } from '../../platform/secret.ts';
import { listMembers, listOpenInvitations } from './member.read-model.ts';
import { memberRepository } from './member.repository.ts';

export const invitationDays = 7;
type Audit = (manager: EntityManager, target: string, detail?: Record<string, unknown>) => Promise<void>;

export function createMemberService(deps: Deps) {
  const { dataSource } = deps;

  /** A station without a manager could never be managed again. */
  async function keepOneManager(manager: EntityManager, stationId: number, userId: string): Promise<void> {
    const managers = await memberRepository.lockManagers(manager, stationId);
    if (managers.length === 1 && managers[0] === userId) {
      throw new Conflict('This is the last manager of the station. Make somebody else manager first.');
    }
  }

  /** A changed role must not live on in a token that is still good: whoever it concerns signs in again. */
  async function endSessions(manager: EntityManager, userId: string, reason: string): Promise<void> {
    await manager.query(
      'UPDATE session SET revoked_at = now(), revoked_reason = $2 WHERE user_id = $1 AND revoked_at IS NULL',
      [userId, reason],
    );
  }

  return {
    async invite(
      stationId: number,
      invitedBy: string | null,
      given: { email: string; role: Role },
      audit: Audit,
    ) {
      const token = makeSecret();
      const { row, station } = await inTransaction(dataSource, async (manager) => {
        const members = await listMembers(manager, stationId);
        if (members.some((m) => m.email === given.email))
          throw new Conflict('This person is a member already.');
        const invitation = await memberRepository.invite(manager, {
          stationId,
          ...given,
          tokenHash: hashSecret(token),
          invitedBy,
          expiresAt: new Date(Date.now() + invitationDays * 86_400_000),
        });
        await audit(manager, invitation.id, given);
        const [open] = await listOpenInvitations(manager, stationId, invitation.id);
        if (!open) throw new NotFound('This invitation');
        return { row: open, station: await manager.findOneByOrFail(Station, { id: stationId }) };
      });
      deps.mailer.send({
        to: given.email,
        subject: `Invitation to ${station.name}`,
        text:
          `You are invited to ${station.name} (${station.callSign}) as ${given.role}.\n\n` +
          `${deps.config.publicUrl}/invitation#${token}\n\n` +
          `The link works once, for ${invitationDays} days. If you do not expect it, nothing has to be done.\n`,
      });
      return row;
    },

    async withdraw(stationId: number, id: string, audit: Audit): Promise<void> {
      await inTransaction(dataSource, async (manager) => {
        if (!(await memberRepository.withdraw(manager, stationId, id))) throw new NotFound('This invitation');
        await audit(manager, id);
      });
    },

    async changeRole(stationId: number, userId: string, role: Role, audit: Audit) {
      return inTransaction(dataSource, async (manager) => {
        const membership = await memberRepository.find(manager, stationId, userId);
        if (!membership) throw new NotFound('This member');
        if (role !== 'manager') await keepOneManager(manager, stationId, userId);
        if (membership.role !== role) {
          await memberRepository.setRole(manager, stationId, userId, role);
          await endSessions(manager, userId, 'role changed');
        }
        await audit(manager, userId, { from: membership.role, to: role });
        const [row] = await listMembers(manager, stationId, userId);
        if (!row) throw new NotFound('This member');
        return row;
      });
    },

    async remove(stationId: number, userId: string, audit: Audit): Promise<void> {
      await inTransaction(dataSource, async (manager) => {
        if (!(await memberRepository.find(manager, stationId, userId))) throw new NotFound('This member');
        await keepOneManager(manager, stationId, userId);
        await memberRepository.remove(manager, stationId, userId);
        await endSessions(manager, userId, 'membership ended');
        await audit(manager, userId);
      });
    },
  };
}
