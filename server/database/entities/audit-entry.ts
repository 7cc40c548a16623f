import { Column, Entity, ForeignKey, Index, PrimaryGeneratedColumn } from 'typeorm';
import { Station } from './station.ts';

/** One line of the audit trail. Insert only: the database refuses to change or delete a row. */
@Entity('audit_entry')
@Index('audit_entry_station', ['stationId', 'id'])
export class AuditEntry {
  @PrimaryGeneratedColumn('identity', { type: 'bigint', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ name: 'station_id', type: 'integer', nullable: true })
  @ForeignKey(() => Station, { name: 'audit_entry_station_id_fkey', onDelete: 'SET NULL' })
  stationId!: number | null;

  @Column({ type: 'timestamptz', default: () => 'now()' })
  at!: Date;

  /** Not a foreign key: the trail outlives the account. */
  @Column({ name: 'user_id', type: 'uuid', nullable: true })
  userId!: string | null;

  @Column({ name: 'token_id', type: 'uuid', nullable: true })
  tokenId!: string | null;

  /** `<noun>.<verb>`, e.g. `dwell.edit`. */
  @Column({ type: 'text' })
  action!: string;

  @Column({ type: 'text', default: '' })
  target!: string;

  @Column({ type: 'jsonb', default: {} })
  detail!: Record<string, unknown>;

  @Column({ name: 'request_id', type: 'text', default: '' })
  requestId!: string;
}
