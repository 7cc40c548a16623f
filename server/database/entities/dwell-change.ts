import { Check, Column, Entity, ForeignKey, Index, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import { Station } from './station.ts';
import { User } from './user.ts';

export type DwellAction = 'add' | 'edit' | 'split' | 'close' | 'delete' | 'import' | 'undo';

/** Who changed which dwell, when, from what to what. Undo reads it; a batch is undone as one. */
@Entity('dwell_change')
@Index('dwell_change_batch', ['stationId', 'batchId'])
@Check('dwell_change_action_check', `action IN ('add', 'edit', 'split', 'close', 'delete', 'import', 'undo')`)
export class DwellChange {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'dwell_change_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryGeneratedColumn('identity', { type: 'bigint', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ name: 'batch_id', type: 'uuid' })
  batchId!: string;

  /** Not a foreign key: the history of a deleted dwell stays. */
  @Column({ name: 'dwell_id', type: 'bigint' })
  dwellId!: number;

  @Column({ type: 'text' })
  action!: DwellAction;

  /** The dwell as it was; null when it was added. */
  @Column({ type: 'jsonb', nullable: true })
  before!: Record<string, unknown> | null;

  /** The dwell as it became; null when it was deleted. */
  @Column({ type: 'jsonb', nullable: true })
  after!: Record<string, unknown> | null;

  @Column({ name: 'user_id', type: 'uuid', nullable: true })
  @ForeignKey(() => User, { name: 'dwell_change_user_id_fkey', onDelete: 'SET NULL' })
  userId!: string | null;

  @Column({ name: 'token_id', type: 'uuid', nullable: true })
  tokenId!: string | null;

  @Column({ type: 'timestamptz', default: () => 'now()' })
  at!: Date;
}
