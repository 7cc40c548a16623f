import type { EntityManager } from 'typeorm';
import { IsNull } from 'typeorm';
import type { Role } from '../../../shared/contracts/permission.ts';
import { Invitation } from '../../database/entities/invitation.ts';
import { Membership } from '../../database/entities/membership.ts';

export const memberRepository = {
  /**
   * Locks the station's managers, so that two requests cannot each remove the other one. Who cannot sign in
   * any more does not count: a station with only such a manager could never be managed again.
   */
  async lockManagers(manager: EntityManager, stationId: number): Promise<string[]> {
    const rows: { user_id: string }[] = await manager.query(
      `SELECT m.user_id FROM membership m JOIN app_user u ON u.id = m.user_id
       WHERE m.station_id = $1 AND m.role = 'manager' AND u.disabled_at IS NULL ORDER BY m.user_id FOR UPDATE OF m`,
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
      { stationId, id, acceptedAt: IsNull(), withdrawnAt: IsNull() },
      { withdrawnAt: new Date() },
    );
    return result.affected === 1;
  },
};
