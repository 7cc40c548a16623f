import { Check, Column, Entity, PrimaryGeneratedColumn } from 'typeorm';

/** A receiving station and the standing rules under which its antennas are compared. */
@Entity('station')
@Check('station_latitude_deg_check', `latitude_deg BETWEEN -90 AND 90`)
@Check('station_longitude_deg_check', `longitude_deg BETWEEN -180 AND 180`)
@Check('station_itu_region_check', `itu_region BETWEEN 1 AND 3`)
@Check('station_guard_seconds_check', `guard_seconds BETWEEN 0 AND 600`)
@Check('station_block_minutes_check', `block_minutes IN (5, 10, 15, 20, 30, 60)`)
@Check('station_window_seconds_check', `window_seconds BETWEEN 1 AND 300`)
@Check('station_freq_tolerance_100hz_check', `freq_tolerance_100hz BETWEEN 0 AND 50`)
@Check('station_margin_db_check', `margin_db > 0 AND margin_db <= 20`)
@Check('station_sector_count_check', `sector_count IN (4, 6, 8, 12, 16, 18, 24, 36)`)
export class Station {
  @PrimaryGeneratedColumn('identity', { type: 'integer', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ type: 'text' })
  name!: string;

  @Column({ name: 'call_sign', type: 'text' })
  callSign!: string;

  /** Maidenhead. */
  @Column({ type: 'text' })
  locator!: string;

  @Column({ name: 'latitude_deg', type: 'double precision' })
  latitudeDeg!: number;

  @Column({ name: 'longitude_deg', type: 'double precision' })
  longitudeDeg!: number;

  /** IANA name, e.g. `Europe/Dublin`. */
  @Column({ name: 'time_zone', type: 'text' })
  timeZone!: string;

  @Column({ name: 'itu_region', type: 'smallint' })
  ituRegion!: number;

  @Column({ name: 'guard_seconds', type: 'smallint', default: 20 })
  guardSeconds!: number;

  @Column({ name: 'block_minutes', type: 'smallint', default: 15 })
  blockMinutes!: number;

  @Column({ name: 'window_seconds', type: 'smallint', default: 30 })
  windowSeconds!: number;

  @Column({ name: 'freq_tolerance_100hz', type: 'smallint', default: 3 })
  freqTolerance100hz!: number;

  @Column({ name: 'margin_db', type: 'real', default: 1 })
  marginDb!: number;

  @Column({ name: 'sector_count', type: 'smallint', default: 12 })
  sectorCount!: number;

  @Column({ name: 'is_demo', type: 'boolean', default: false })
  isDemo!: boolean;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;
}
