import { Column, Entity, PrimaryColumn } from 'typeorm';

/** One tick of a timed job: the first worker to insert the row runs it. */
@Entity('timed_run')
export class TimedRun {
  @PrimaryColumn({ type: 'text' })
  name!: string;

  @PrimaryColumn({ type: 'timestamptz' })
  tick!: Date;

  @Column({ name: 'claimed_by', type: 'text' })
  claimedBy!: string;
}
