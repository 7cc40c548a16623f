import {
  Check,
  Column,
  Entity,
  Exclusion,
  ForeignKey,
  Index,
  PrimaryColumn,
  PrimaryGeneratedColumn,
} from 'typeorm';
import { Antenna } from './antenna.ts';
import { Receiver } from './receiver.ts';
import { User } from './user.ts';

export type DwellSource = 'hand' | 'import' | 'token' | 'plan';

/**
 * One line of the switch log: a receiver on an antenna during `[startsAt, endsAt)`; `endsAt` null = still
 * on. The database refuses a second dwell on the same receiver at the same time (SQLSTATE 23P01).
 */
@Entity('dwell')
@ForeignKey(() => Receiver, ['stationId', 'receiverId'], ['stationId', 'id'], {
  name: 'dwell_station_id_receiver_id_fkey',
})
@ForeignKey(() => Antenna, ['stationId', 'antennaId'], ['stationId', 'id'], {
  name: 'dwell_station_id_antenna_id_fkey',
})
@Index('dwell_start', ['stationId', 'startsAt'])
@Check('dwell_order', `ends_at IS NULL OR ends_at > starts_at`)
@Check('dwell_source_check', `source IN ('hand', 'import', 'token', 'plan')`)
@Exclusion('dwell_no_overlap', `USING gist (station_id WITH =, receiver_id WITH =, during WITH &&)`)
export class Dwell {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  stationId!: number;

  @PrimaryGeneratedColumn('identity', { type: 'bigint', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ name: 'receiver_id', type: 'integer' })
  receiverId!: number;

  @Column({ name: 'antenna_id', type: 'integer' })
  antennaId!: number;

  @Column({ name: 'starts_at', type: 'timestamptz' })
  startsAt!: Date;

  @Column({ name: 'ends_at', type: 'timestamptz', nullable: true })
  endsAt!: Date | null;

  /** Computed by the database for its own overlap check and for joins in SQL; never selected. */
  @Column({
    type: 'tstzrange',
    generatedType: 'STORED',
    asExpression: `tstzrange(starts_at, ends_at, '[)'::text)`,
    select: false,
    insert: false,
    update: false,
  })
  during!: string;

  @Column({ type: 'text' })
  source!: DwellSource;

  @Column({ type: 'text', default: '' })
  note!: string;

  @Column({ name: 'import_id', type: 'integer', nullable: true })
  importId!: number | null;

  @Column({ name: 'created_by', type: 'uuid', nullable: true })
  @ForeignKey(() => User, { name: 'dwell_created_by_fkey', onDelete: 'SET NULL' })
  createdBy!: string | null;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;
}
