import { Check, Column, Entity, ForeignKey, Index, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import { Station } from './station.ts';
import { User } from './user.ts';

export type JobKind = 'import' | 'import-undo' | 'units' | 'bearings';
export type JobState = 'queued' | 'running' | 'done' | 'dead' | 'cancelled';

/** Long work, claimed by a worker with `FOR UPDATE SKIP LOCKED`; `dead` = given up, a person sees it. */
@Entity('job')
@Index('job_waiting', { synchronize: false })
@Check('job_kind_check', `kind IN ('import', 'import-undo', 'units', 'bearings')`)
@Check('job_state_check', `state IN ('queued', 'running', 'done', 'dead', 'cancelled')`)
export class Job {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'job_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryGeneratedColumn('identity', { type: 'bigint', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ type: 'text' })
  kind!: JobKind;

  @Column({ type: 'jsonb' })
  payload!: Record<string, unknown>;

  @Column({ type: 'text', default: 'queued' })
  state!: JobState;

  @Column({ type: 'smallint', default: 0 })
  attempts!: number;

  @Column({ name: 'max_attempts', type: 'smallint', default: 5 })
  maxAttempts!: number;

  /** Not before; moved ahead after a failure. */
  @Column({ name: 'run_at', type: 'timestamptz', default: () => 'now()' })
  runAt!: Date;

  @Column({ name: 'claimed_by', type: 'text', nullable: true })
  claimedBy!: string | null;

  @Column({ name: 'heartbeat_at', type: 'timestamptz', nullable: true })
  heartbeatAt!: Date | null;

  @Column({ type: 'jsonb', nullable: true })
  progress!: Record<string, unknown> | null;

  @Column({ type: 'text', nullable: true })
  error!: string | null;

  @Column({ name: 'cancel_requested', type: 'boolean', default: false })
  cancelRequested!: boolean;

  @Column({ name: 'created_by', type: 'uuid', nullable: true })
  @ForeignKey(() => User, { name: 'job_created_by_fkey', onDelete: 'SET NULL' })
  createdBy!: string | null;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;

  @Column({ name: 'finished_at', type: 'timestamptz', nullable: true })
  finishedAt!: Date | null;
}
