import { Check, Column, Entity, ForeignKey, Index, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import { Station } from './station.ts';
import { User } from './user.ts';

/** A station's own correction of where a call, or all calls with a prefix, are. */
@Entity('position_override')
@Index('position_override_pattern', ['stationId', 'matches', 'pattern'], { unique: true })
@Check('position_override_matches_check', `matches IN ('call', 'prefix')`)
@Check('position_override_radius_km_check', `radius_km >= 0 AND radius_km <= 10000`)
export class PositionOverride {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'position_override_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryGeneratedColumn('identity', { type: 'integer', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ type: 'text' })
  matches!: 'call' | 'prefix';

  @Column({ type: 'text' })
  pattern!: string;

  /** Maidenhead. */
  @Column({ type: 'text' })
  locator!: string;

  @Column({ name: 'radius_km', type: 'real', default: 50 })
  radiusKm!: number;

  @Column({ name: 'created_by', type: 'uuid', nullable: true })
  @ForeignKey(() => User, { name: 'position_override_created_by_fkey', onDelete: 'SET NULL' })
  createdBy!: string | null;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;
}
