import { Column, Entity, ForeignKey, Index, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import { Station } from './station.ts';
import { User } from './user.ts';

/** A question kept under a name, unique among the station's trials that are not archived. */
@Entity('trial')
@Index('trial_name', { synchronize: false })
export class Trial {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'trial_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryGeneratedColumn('identity', { type: 'integer', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ type: 'text' })
  name!: string;

  /** Parsed with its contract when read: it may have been written by an earlier release. */
  @Column({ type: 'jsonb' })
  question!: Record<string, unknown>;

  @Column({ type: 'text', default: '' })
  notes!: string;

  @Column({ name: 'created_by', type: 'uuid', nullable: true })
  @ForeignKey(() => User, { name: 'trial_created_by_fkey', onDelete: 'SET NULL' })
  createdBy!: string | null;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;

  @Column({ name: 'updated_at', type: 'timestamptz', default: () => 'now()' })
  updatedAt!: Date;

  @Column({ name: 'archived_at', type: 'timestamptz', nullable: true })
  archivedAt!: Date | null;
}
