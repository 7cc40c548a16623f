import { Column, Entity, Index, JoinColumn, ManyToOne, PrimaryColumn, type Relation } from 'typeorm';
import { Session } from './session.ts';

/** One step of a session's rotation. A used token that comes back revokes the whole session. */
@Entity('refresh_token')
@Index('refresh_token_session', ['sessionId'])
export class RefreshToken {
  /** SHA-256 of the token; the token itself is never kept. */
  @PrimaryColumn({ name: 'token_hash', type: 'bytea' })
  tokenHash!: Buffer;

  @Column({ name: 'session_id', type: 'uuid' })
  sessionId!: string;

  @ManyToOne(() => Session, { onDelete: 'CASCADE' })
  @JoinColumn({ name: 'session_id', foreignKeyConstraintName: 'refresh_token_session_id_fkey' })
  session!: Relation<Session>;

  @Column({ name: 'issued_at', type: 'timestamptz', default: () => 'now()' })
  issuedAt!: Date;

  @Column({ name: 'expires_at', type: 'timestamptz' })
  expiresAt!: Date;

  @Column({ name: 'used_at', type: 'timestamptz', nullable: true })
  usedAt!: Date | null;
}
