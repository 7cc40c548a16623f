import { Check, Column, Entity, Index, PrimaryGeneratedColumn } from 'typeorm';

export type LengthUnit = 'm' | 'ft';
export type Theme = 'system' | 'dark' | 'light';

/** A person with an account. `email` is kept in lower case, so that it is unique whatever the typing. */
@Entity('app_user')
@Index('app_user_email', ['email'], { unique: true })
@Check('app_user_email_check', `email = lower(email)`)
@Check('app_user_length_unit_check', `length_unit IN ('m', 'ft')`)
@Check('app_user_theme_check', `theme IN ('system', 'dark', 'light')`)
export class User {
  @PrimaryGeneratedColumn('uuid')
  id!: string;

  @Column({ type: 'text' })
  email!: string;

  @Column({ type: 'text' })
  name!: string;

  /** argon2id; never leaves the server. */
  @Column({ name: 'password_hash', type: 'text' })
  passwordHash!: string;

  @Column({ name: 'length_unit', type: 'text', default: 'm' })
  lengthUnit!: LengthUnit;

  @Column({ type: 'text', default: 'system' })
  theme!: Theme;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;

  @Column({ name: 'password_changed_at', type: 'timestamptz', default: () => 'now()' })
  passwordChangedAt!: Date;

  @Column({ name: 'disabled_at', type: 'timestamptz', nullable: true })
  disabledAt!: Date | null;
}
