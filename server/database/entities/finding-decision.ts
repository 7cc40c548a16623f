import { Check, Column, Entity, ForeignKey, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import { Finding } from './finding.ts';
import { User } from './user.ts';

export type DecisionKind = 'keep' | 'rebuild' | 'take down' | 'look again';

/** What was decided on a finding. Append-only; the last one counts. */
@Entity('finding_decision')
@ForeignKey(() => Finding, ['stationId', 'findingId'], ['stationId', 'id'], {
  name: 'finding_decision_station_id_finding_id_fkey',
  onDelete: 'CASCADE',
})
@Check('finding_decision_decision_check', `decision IN ('keep', 'rebuild', 'take down', 'look again')`)
@Check('finding_decision_about_check', `about IN ('a', 'b')`)
@Check('finding_decision_reason_check', `reason <> ''`)
@Check('finding_decision_date', `(decision = 'look again') = (look_again_on IS NOT NULL)`)
export class FindingDecision {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  stationId!: number;

  @PrimaryColumn({ name: 'finding_id', type: 'integer' })
  findingId!: number;

  @PrimaryGeneratedColumn('identity', { type: 'integer', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ type: 'text' })
  decision!: DecisionKind;

  /** Antenna A or B of the finding; null: the finding as a whole. */
  @Column({ type: 'text', nullable: true })
  about!: 'a' | 'b' | null;

  @Column({ name: 'look_again_on', type: 'date', nullable: true })
  lookAgainOn!: string | null;

  @Column({ type: 'text' })
  reason!: string;

  @Column({ name: 'decided_by', type: 'uuid', nullable: true })
  @ForeignKey(() => User, { name: 'finding_decision_decided_by_fkey', onDelete: 'SET NULL' })
  decidedBy!: string | null;

  @Column({ name: 'decided_by_name', type: 'text' })
  decidedByName!: string;

  @Column({ name: 'decided_at', type: 'timestamptz', default: () => 'now()' })
  decidedAt!: Date;
}
