import type { EntityManager } from 'typeorm';
import { ApiToken } from '../../database/entities/api-token.ts';

export const tokenRepository = {
  list: (manager: EntityManager, stationId: number) =>
    manager.find(ApiToken, { where: { stationId }, order: { createdAt: 'DESC' } }),
  add: (
    manager: EntityManager,
    token: Pick<ApiToken, 'stationId' | 'name' | 'scopes' | 'tokenHash' | 'createdBy' | 'expiresAt'>,
  ) => manager.save(manager.create(ApiToken, token)),
  async revoke(manager: EntityManager, stationId: number, id: string): Promise<boolean> {
    const result = await manager
      .createQueryBuilder()
      .update(ApiToken)
      .set({ revokedAt: () => 'coalesce(revoked_at, now())' })
      .where({ stationId, id })
      .execute();
    return result.affected === 1;
  },
};
