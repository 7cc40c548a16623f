import type { EntityManager } from 'typeorm';

export interface MissingNightsQuestion {
  stationId: number;
  standingKey: string;
  rulesKey: string;
  /** `YYYY-MM-DD`, both included; null: open on that side. */
  fromNight: string | null;
  toNight: string | null;
  /**
   * The night of the present, which live spots change every few seconds: it is not waited for once other nights
   * were made under these rules. null: it counts as any other.
   */
  tonight: string | null;
}

/**
 * Nights made under the standing rules whose units under the other rules do not exist or are older than those:
 * a change has been followed under the standing rules only. Newest first.
 */
export async function findMissingNights(
  manager: EntityManager,
  question: MissingNightsQuestion,
): Promise<string[]> {
  const { stationId, standingKey, rulesKey, fromNight, toNight, tonight } = question;
  const rows: { night: string }[] = await manager.query(
    `SELECT s.night FROM unit_night s
     WHERE s.station_id = $1 AND s.rules_key = $2
       AND s.night >= coalesce($4::date, '-infinity') AND s.night <= coalesce($5::date, 'infinity')
       AND CASE WHEN s.night = $6::date
         THEN NOT EXISTS (SELECT FROM unit_night o WHERE o.station_id = $1 AND o.rules_key = $3)
         ELSE NOT EXISTS (SELECT FROM unit_night o
           WHERE o.station_id = $1 AND o.rules_key = $3 AND o.night = s.night AND o.made_at >= s.made_at) END
     ORDER BY s.night DESC`,
    [stationId, standingKey, rulesKey, fromNight, toNight, tonight],
  );
  return rows.map(({ night }) => night);
}
