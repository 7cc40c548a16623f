import type { EntityManager } from 'typeorm';
import { Finding } from '../../database/entities/finding.ts';
import { FindingDecision } from '../../database/entities/finding-decision.ts';
import { FindingShare } from '../../database/entities/finding-share.ts';

type NewShare = Pick<
  FindingShare,
  'stationId' | 'findingId' | 'tokenHash' | 'label' | 'createdBy' | 'expiresAt'
>;

/** Findings and decisions are only ever added; the database refuses everything else. */
export const findingRepository = {
  async add(manager: EntityManager, finding: Omit<Finding, 'id' | 'frozenAt'>): Promise<number> {
    const { id } = await manager.save(manager.create(Finding, finding));
    return id;
  },

  async decide(manager: EntityManager, decision: Omit<FindingDecision, 'id' | 'decidedAt'>): Promise<number> {
    const { id } = await manager.save(manager.create(FindingDecision, decision));
    return id;
  },

  async addShare(manager: EntityManager, share: NewShare): Promise<string> {
    const { id } = await manager.save(manager.create(FindingShare, share));
    return id;
  },

  /** Withdrawing twice is the same as once: the first time stays. */
  async withdrawShare(
    manager: EntityManager,
    stationId: number,
    findingId: number,
    id: string,
  ): Promise<boolean> {
    const result = await manager
      .createQueryBuilder()
      .update(FindingShare)
      .set({ withdrawnAt: () => 'coalesce(withdrawn_at, now())' })
      .where({ stationId, findingId, id })
      .execute();
    return result.affected === 1;
  },

  /**
   * The finding that a link's token opens, and notes that it was read; null for a token that is unknown,
   * expired or withdrawn. Looked up by the hash: the time it takes says nothing about the token.
   */
  async useShare(
    manager: EntityManager,
    tokenHash: Buffer,
    now: Date,
  ): Promise<{ stationId: number; findingId: number; expiresAt: Date } | null> {
    const [rows]: [{ station_id: number; finding_id: number; expires_at: Date }[], number] =
      await manager.query(
        `UPDATE finding_share SET last_read_at = $2, times_read = times_read + 1
         WHERE token_hash = $1 AND withdrawn_at IS NULL AND expires_at > $2
         RETURNING station_id, finding_id, expires_at`,
        [tokenHash, now],
      );
    const row = rows[0];
    return row ? { stationId: row.station_id, findingId: row.finding_id, expiresAt: row.expires_at } : null;
  },
};
