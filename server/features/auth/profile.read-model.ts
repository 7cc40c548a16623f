import type { EntityManager } from 'typeorm';
import type { Profile } from '../../../shared/contracts/auth.ts';
import type { Role } from '../../../shared/contracts/permission.ts';
import { NotSignedIn } from '../../platform/errors.ts';

interface Row {
  id: string;
  email: string;
  name: string;
  length_unit: 'm' | 'ft';
  theme: Profile['theme'];
  created_at: Date;
  memberships: { stationId: number; stationName: string; callSign: string; role: Role }[];
}

/** A person as they see themselves: settings and the stations they belong to. */
export async function readProfile(manager: EntityManager, userId: string): Promise<Profile> {
  const rows: Row[] = await manager.query(
    `SELECT u.id, u.email, u.name, u.length_unit, u.theme, u.created_at,
       coalesce((SELECT jsonb_agg(jsonb_build_object('stationId', s.id, 'stationName', s.name, 'callSign', s.call_sign,
           'role', m.role) ORDER BY s.name)
         FROM membership m JOIN station s ON s.id = m.station_id WHERE m.user_id = u.id), '[]') AS memberships
     FROM app_user u WHERE u.id = $1 AND u.disabled_at IS NULL`,
    [userId],
  );
  const row = rows[0];
  if (!row) throw new NotSignedIn();
  return {
    id: row.id,
    email: row.email,
    name: row.name,
    lengthUnit: row.length_unit,
    theme: row.theme,
    createdAt: row.created_at.toISOString(),
    memberships: row.memberships,
  };
}
