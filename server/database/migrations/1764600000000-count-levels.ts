import type { MigrationInterface, QueryRunner } from 'typeorm';

/**
 * The tally of a night now counts its spots by SNR, which the censored view reads a receiver's limit from, and
 * two receivers on one antenna make units too, which tell their offsets. Units are a cache: one hour of each
 * night is marked, and the worker makes the whole night anew.
 */
export class CountLevels1764600000000 implements MigrationInterface {
  async up(queryRunner: QueryRunner): Promise<void> {
    await queryRunner.query(`
      ALTER TABLE unit_pack DROP CONSTRAINT unit_pack_check, ADD CONSTRAINT unit_pack_check CHECK (antenna_a <= antenna_b)`);
    await queryRunner.query(`
      INSERT INTO dirty_block (station_id, starts_at)
      SELECT DISTINCT n.station_id, date_trunc('hour',
        (n.night + interval '24 hours' - s.longitude_deg / 15 * interval '1 hour') AT TIME ZONE 'UTC')
      FROM unit_night n JOIN station s ON s.id = n.station_id
      ON CONFLICT (station_id, starts_at) DO UPDATE SET marked_at = now()`);
  }

  /** The program before does not read the counts: nothing to take down. */
  async down(): Promise<void> {
    return Promise.resolve();
  }
}
