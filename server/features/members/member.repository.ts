import type { EntityManager } from 'typeorm';
import { IsNull, MoreThan } from 'typeorm';
import type { Role } from '../../../shared/contracts/permission.ts';
import { Invitation } from '../../database/entities/invitation.ts';
import { Membership } from '../../database/entities/membership.ts';

export const memberRepository = {
  /** Locks the station's managers, so that two requests cannot each remove the other one. */
  async lockManagers(manager: EntityManager, stationId: number): Promise<string[]> {
    const rows: { user_id: string }[] = await manager.query(
      `SELECT user_id FROM membership WHERE station_id = $1 AND role = 'manager' ORDER BY user_id FOR UPDATE`,
      [stationId],
    );
    return rows.map((row) => row.user_id);
  },
  find: (manager: EntityManager, stationId: number, userId: string) =>
    manager.findOneBy(Membership, { stationId, userId }),
  async setRole(manager: EntityManager, stationId: number, userId: string, role: Role): Promise<void> {
    await manager.update(Membership, { stationId, userId }, { role });
  },
  async remove(manager: EntityManager, stationId: number, userId: string): Promise<void> {
    await manager.delete(Membership, { stationId, userId });
  },
  async invite(
    manager: EntityManager,
    invitation: Pick<Invitation, 'stationId' | 'email' | 'role' | 'tokenHash' | 'invitedBy' | 'expiresAt'>,
  ): Promise<Invitation> {
    await manager.update(
      Invitation,
      {
        stationId: invitation.stationId,
        email: invitation.email,
        acceptedAt: IsNull(),
        withdrawnAt: IsNull(),
      },
      { withdrawnAt: new Date() },
    );
    return manager.save(manager.create(Invitation, invitation));
  },
  async withdraw(manager: EntityManager, stationId: number, id: string): Promise<boolean> {
    const result = await manager.update(
      Invitation,
      { stationId, id, acceptedAt: IsNull(), withdrawnAt: IsNull(), expiresAt: MoreThan(new Date(0)) },
      { withdrawnAt: new Date() },
    );
    return result.affected === 1;
  },
};
