import { Check, Column, Entity, Index, JoinColumn, ManyToOne, PrimaryColumn, type Relation } from 'typeorm';
import type { Role } from '../../../shared/contracts/permission.ts';
import { Station } from './station.ts';
import { User } from './user.ts';

/** What a person may do at a station. No row, no access. */
@Entity('membership')
@Index('membership_user', ['userId'])
@Check('membership_role_check', `role IN ('manager', 'operator', 'analyst', 'contester')`)
export class Membership {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  stationId!: number;

  @ManyToOne(() => Station, { onDelete: 'CASCADE' })
  @JoinColumn({ name: 'station_id', foreignKeyConstraintName: 'membership_station_id_fkey' })
  station!: Relation<Station>;

  @PrimaryColumn({ name: 'user_id', type: 'uuid' })
  userId!: string;

  @ManyToOne(() => User, { onDelete: 'CASCADE' })
  @JoinColumn({ name: 'user_id', foreignKeyConstraintName: 'membership_user_id_fkey' })
  user!: Relation<User>;

  @Column({ type: 'text' })
  role!: Role;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;
}
