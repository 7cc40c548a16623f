import type { EntityManager } from 'typeorm';
import type { z } from 'zod';
import type { invitation, member } from '../../../shared/contracts/member.ts';

type Member = z.input<typeof member>;
type InvitationRow = z.input<typeof invitation>;

export async function listMembers(
  manager: EntityManager,
  stationId: number,
  userId?: string,
): Promise<Member[]> {
  const rows: (Omit<Member, 'since'> & { since: Date })[] = await manager.query(
    `SELECT u.id AS "userId", u.name, u.email, m.role, m.created_at AS since
     FROM membership m JOIN app_user u ON u.id = m.user_id
     WHERE m.station_id = $1 AND ($2::uuid IS NULL OR m.user_id = $2) ORDER BY u.name, u.id`,
    [stationId, userId ?? null],
  );
  return rows.map((row) => ({ ...row, since: row.since.toISOString() }));
}

export async function listOpenInvitations(
  manager: EntityManager,
  stationId: number,
  id?: string,
): Promise<InvitationRow[]> {
  const rows: (Omit<InvitationRow, 'createdAt' | 'expiresAt'> & { createdAt: Date; expiresAt: Date })[] =
    await manager.query(
      `SELECT i.id, i.email, i.role, u.name AS "invitedBy", i.created_at AS "createdAt", i.expires_at AS "expiresAt"
       FROM invitation i LEFT JOIN app_user u ON u.id = i.invited_by
       WHERE i.station_id = $1 AND i.accepted_at IS NULL AND i.withdrawn_at IS NULL AND i.expires_at > now()
         AND ($2::uuid IS NULL OR i.id = $2)
       ORDER BY i.created_at DESC`,
      [stationId, id ?? null],
    );
  return rows.map((row) => ({
    ...row,
    createdAt: row.createdAt.toISOString(),
    expiresAt: row.expiresAt.toISOString(),
  }));
}
