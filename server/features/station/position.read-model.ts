import type { EntityManager } from 'typeorm';
import { PositionOverride } from '../../database/entities/position-override.ts';

export async function listPositions(manager: EntityManager, stationId: number) {
  const rows = await manager.find(PositionOverride, {
    where: { stationId },
    order: { matches: 'ASC', pattern: 'ASC' },
  });
  return rows.map(presentPosition);
}

export function presentPosition({ id, matches, pattern, locator, radiusKm }: PositionOverride) {
  return { id, matches, pattern, locator, radiusKm };
}
