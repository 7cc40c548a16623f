import { Check, Column, Entity, ForeignKey, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import { Station } from './station.ts';
import { Trial } from './trial.ts';
import { User } from './user.ts';

/** An answer as it was frozen, with everything it rests on. The database refuses to change or delete it. */
@Entity('finding')
@ForeignKey(() => Trial, ['stationId', 'trialId'], ['stationId', 'id'], {
  name: 'finding_station_id_trial_id_fkey',
})
@Check('finding_title_check', `title <> ''`)
@Check('finding_digest_check', `octet_length(digest) = 32`)
@Check('finding_nights', `first_night <= last_night`)
export class Finding {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'finding_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryGeneratedColumn('identity', { type: 'integer', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ name: 'trial_id', type: 'integer', nullable: true })
  trialId!: number | null;

  @Column({ type: 'text' })
  title!: string;

  @Column({ type: 'text', default: '' })
  note!: string;

  @Column({ type: 'jsonb' })
  question!: Record<string, unknown>;

  /** The question in words. */
  @Column({ type: 'text' })
  sentence!: string;

  @Column({ type: 'jsonb' })
  headline!: Record<string, unknown>;

  @Column({ type: 'jsonb' })
  answer!: Record<string, unknown>;

  @Column({ type: 'jsonb' })
  circumstances!: Record<string, unknown>;

  /** `YYYY-MM-DD`. */
  @Column({ name: 'first_night', type: 'date' })
  firstNight!: string;

  @Column({ name: 'last_night', type: 'date' })
  lastNight!: string;

  @Column({ type: 'bytea' })
  digest!: Buffer;

  @Column({ name: 'night_digests', type: 'jsonb' })
  nightDigests!: Record<string, unknown>[];

  /** Units, heard-only stations, calls, tallies and dwells, packed by evidence-codec.ts. */
  @Column({ type: 'bytea' })
  evidence!: Buffer;

  @Column({ name: 'dwell_count', type: 'integer' })
  dwellCount!: number;

  /** SVG by name of the picture, whole and in sheets for paper. */
  @Column({ type: 'jsonb' })
  pictures!: Record<string, { whole: string; sheets: string[] }>;

  @Column({ name: 'program_version', type: 'text' })
  programVersion!: string;

  @Column({ name: 'frozen_by', type: 'uuid', nullable: true })
  @ForeignKey(() => User, { name: 'finding_frozen_by_fkey', onDelete: 'SET NULL' })
  frozenBy!: string | null;

  /** As the person was called then; stays when the account goes. */
  @Column({ name: 'frozen_by_name', type: 'text' })
  frozenByName!: string;

  @Column({ name: 'frozen_at', type: 'timestamptz', default: () => 'now()' })
  frozenAt!: Date;
}
