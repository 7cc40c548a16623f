import type { EntityManager } from 'typeorm';
import { comparisonQuestion } from '../../../shared/contracts/comparison.ts';
import type { Trial } from '../../../shared/contracts/comparison.ts';

interface Row {
  id: number;
  name: string;
  question: unknown;
  notes: string;
  created_by: string | null;
  created_at: Date;
  updated_at: Date;
}

/** Saved questions that are not put away, the last changed first. */
export async function listTrials(manager: EntityManager, stationId: number, id?: number): Promise<Trial[]> {
  const rows: Row[] = await manager.query(
    `SELECT t.id, t.name, t.question, t.notes, u.name AS created_by, t.created_at, t.updated_at
     FROM trial t LEFT JOIN app_user u ON u.id = t.created_by
     WHERE t.station_id = $1 AND t.archived_at IS NULL AND ($2::int IS NULL OR t.id = $2)
     ORDER BY t.updated_at DESC, t.id DESC`,
    [stationId, id ?? null],
  );
  return rows.map((row) => ({
    id: row.id,
    name: row.name,
    // Parsed again: a question saved by an older release gets the defaults of what has been added since.
    question: comparisonQuestion.parse(row.question),
    notes: row.notes,
    createdBy: row.created_by,
    createdAt: row.created_at.toISOString(),
    updatedAt: row.updated_at.toISOString(),
  }));
}
