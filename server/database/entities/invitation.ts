import { Check, Column, Entity, ForeignKey, Index, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import type { Role } from '../../../shared/contracts/permission.ts';
import { Station } from './station.ts';
import { User } from './user.ts';

/** A letter that lets its reader join a station with a role. */
@Entity('invitation')
@Index('invitation_token', ['tokenHash'], { unique: true })
@Check('invitation_email_check', `email = lower(email)`)
@Check('invitation_role_check', `role IN ('manager', 'operator', 'analyst', 'contester')`)
export class Invitation {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'invitation_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryGeneratedColumn('uuid')
  id!: string;

  @Column({ type: 'text' })
  email!: string;

  @Column({ type: 'text' })
  role!: Role;

  /** SHA-256 of the token in the letter. */
  @Column({ name: 'token_hash', type: 'bytea' })
  tokenHash!: Buffer;

  @Column({ name: 'invited_by', type: 'uuid', nullable: true })
  @ForeignKey(() => User, { name: 'invitation_invited_by_fkey', onDelete: 'SET NULL' })
  invitedBy!: string | null;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;

  @Column({ name: 'expires_at', type: 'timestamptz' })
  expiresAt!: Date;

  @Column({ name: 'accepted_at', type: 'timestamptz', nullable: true })
  acceptedAt!: Date | null;

  @Column({ name: 'withdrawn_at', type: 'timestamptz', nullable: true })
  withdrawnAt!: Date | null;
}
