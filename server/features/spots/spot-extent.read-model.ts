import type { EntityManager } from 'typeorm';
import { InvalidRequest } from '../../platform/errors.ts';

/** The seconds of a station's first and last spot; null when it has none. Two looks at the index. */
export async function spotExtent(
  manager: EntityManager,
  stationId: number,
): Promise<{ firstMs: number; lastMs: number } | null> {
  const rows: { first: Date | null; last: Date | null }[] = await manager.query(
    `SELECT (SELECT heard_at FROM spot WHERE station_id = $1 ORDER BY heard_at LIMIT 1) AS first,
            (SELECT heard_at FROM spot WHERE station_id = $1 ORDER BY heard_at DESC LIMIT 1) AS last`,
    [stationId],
  );
  const { first, last } = rows[0]!;
  return first && last ? { firstMs: first.getTime(), lastMs: last.getTime() } : null;
}

export function refuseTurnedRange(from: string | undefined, to: string | undefined): void {
  if (from === undefined || to === undefined || Date.parse(from) < Date.parse(to)) return;
  const message = 'The end of the range must come after its start.';
  throw new InvalidRequest(message, [{ path: 'query.to', message }]);
}
