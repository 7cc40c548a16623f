import { Check, Column, Entity, ForeignKey, Index, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import { Finding } from './finding.ts';
import { User } from './user.ts';

/** A link that lets somebody without an account read one finding until it expires or is withdrawn. */
@Entity('finding_share')
@ForeignKey(() => Finding, ['stationId', 'findingId'], ['stationId', 'id'], {
  name: 'finding_share_station_id_finding_id_fkey',
  onDelete: 'CASCADE',
})
@Index('finding_share_token', ['tokenHash'], { unique: true })
@Index('finding_share_finding', ['stationId', 'findingId'])
@Check('finding_share_expiry', `expires_at > created_at`)
export class FindingShare {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  stationId!: number;

  @PrimaryGeneratedColumn('uuid')
  id!: string;

  @Column({ name: 'finding_id', type: 'integer' })
  findingId!: number;

  /** SHA-256 of the token in the link. */
  @Column({ name: 'token_hash', type: 'bytea' })
  tokenHash!: Buffer;

  /** Whom it is for. */
  @Column({ type: 'text' })
  label!: string;

  @Column({ name: 'created_by', type: 'uuid', nullable: true })
  @ForeignKey(() => User, { name: 'finding_share_created_by_fkey', onDelete: 'SET NULL' })
  createdBy!: string | null;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;

  @Column({ name: 'expires_at', type: 'timestamptz' })
  expiresAt!: Date;

  @Column({ name: 'withdrawn_at', type: 'timestamptz', nullable: true })
  withdrawnAt!: Date | null;

  @Column({ name: 'last_read_at', type: 'timestamptz', nullable: true })
  lastReadAt!: Date | null;

  @Column({ name: 'times_read', type: 'integer', default: 0 })
  timesRead!: number;
}
