import { Column, Entity, ForeignKey, PrimaryColumn } from 'typeorm';
import { User } from './user.ts';

/** A link to set a new password; good once, until it expires. */
@Entity('password_reset')
export class PasswordReset {
  /** SHA-256 of the token in the link. */
  @PrimaryColumn({ name: 'token_hash', type: 'bytea' })
  tokenHash!: Buffer;

  @Column({ name: 'user_id', type: 'uuid' })
  @ForeignKey(() => User, { name: 'password_reset_user_id_fkey', onDelete: 'CASCADE' })
  userId!: string;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;

  @Column({ name: 'expires_at', type: 'timestamptz' })
  expiresAt!: Date;

  @Column({ name: 'used_at', type: 'timestamptz', nullable: true })
  usedAt!: Date | null;
}
