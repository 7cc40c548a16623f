import { Column, Entity, ForeignKey, Index, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import type { TokenScope } from '../../../shared/contracts/permission.ts';
import { Station } from './station.ts';
import { User } from './user.ts';

/** A key for a switch controller or a script: hashed, limited to its scopes, expiring. */
@Entity('api_token')
@Index('api_token_hash', ['tokenHash'], { unique: true })
export class ApiToken {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'api_token_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryGeneratedColumn('uuid')
  id!: string;

  @Column({ type: 'text' })
  name!: string;

  /** SHA-256 of the token; the token itself is shown once and never kept. */
  @Column({ name: 'token_hash', type: 'bytea' })
  tokenHash!: Buffer;

  @Column({ type: 'text', array: true })
  scopes!: TokenScope[];

  @Column({ name: 'created_by', type: 'uuid', nullable: true })
  @ForeignKey(() => User, { name: 'api_token_created_by_fkey', onDelete: 'SET NULL' })
  createdBy!: string | null;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;

  @Column({ name: 'expires_at', type: 'timestamptz' })
  expiresAt!: Date;

  @Column({ name: 'last_used_at', type: 'timestamptz', nullable: true })
  lastUsedAt!: Date | null;

  @Column({ name: 'revoked_at', type: 'timestamptz', nullable: true })
  revokedAt!: Date | null;
}
