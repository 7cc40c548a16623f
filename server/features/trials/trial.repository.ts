import type { EntityManager } from 'typeorm';
import { IsNull } from 'typeorm';
import { Trial } from '../../database/entities/trial.ts';

export const trialRepository = {
  find: (manager: EntityManager, stationId: number, id: number) =>
    manager.findOneBy(Trial, { stationId, id, archivedAt: IsNull() }),
  add: (
    manager: EntityManager,
    trial: Pick<Trial, 'stationId' | 'name' | 'question' | 'notes' | 'createdBy'>,
  ) => manager.save(manager.create(Trial, trial)),
  async update(
    manager: EntityManager,
    stationId: number,
    id: number,
    change: Partial<Pick<Trial, 'name' | 'question' | 'notes' | 'archivedAt'>>,
  ): Promise<boolean> {
    const [, changed]: [unknown[], number] = await manager.query(
      `UPDATE trial SET name = coalesce($3, name), question = coalesce($4::jsonb, question), notes = coalesce($5, notes),
         archived_at = coalesce($6, archived_at), updated_at = now()
       WHERE station_id = $1 AND id = $2 AND archived_at IS NULL RETURNING id`,
      [
        stationId,
        id,
        change.name ?? null,
        change.question ? JSON.stringify(change.question) : null,
        change.notes ?? null,
        change.archivedAt ?? null,
      ],
    );
    return changed === 1;
  },
};
