import { Check, Column, Entity, ForeignKey, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import type { ImportKind } from '../../../shared/contracts/import.ts';
import { Station } from './station.ts';
import { User } from './user.ts';

export type ImportState =
  'uploading' | 'uploaded' | 'queued' | 'running' | 'done' | 'failed' | 'cancelled' | 'undone';

/** One uploaded file and what became of its rows (table `import`; `Import` would read as the keyword). */
@Entity('import')
@Check('import_kind_check', `kind IN ('spots', 'dwells')`)
@Check(
  'import_state_check',
  `state IN ('uploading', 'uploaded', 'queued', 'running', 'done', 'failed', 'cancelled', 'undone')`,
)
export class ImportRecord {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'import_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryGeneratedColumn('identity', { type: 'integer', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ type: 'text' })
  kind!: ImportKind;

  @Column({ name: 'file_name', type: 'text' })
  fileName!: string;

  /** Of the file as uploaded; null until all of it has arrived. */
  @Column({ type: 'bytea', nullable: true })
  sha256!: Buffer | null;

  @Column({ name: 'size_bytes', type: 'bigint', default: 0 })
  sizeBytes!: number;

  @Column({ type: 'text' })
  state!: ImportState;

  /** Parsed with its contract when read: it may have been written by an earlier release. */
  @Column({ type: 'jsonb', nullable: true })
  mapping!: Record<string, unknown> | null;

  @Column({ name: 'rows_read', type: 'bigint', default: 0 })
  rowsRead!: number;

  @Column({ name: 'rows_stored', type: 'bigint', default: 0 })
  rowsStored!: number;

  @Column({ name: 'rows_doubled', type: 'bigint', default: 0 })
  rowsDoubled!: number;

  @Column({ name: 'rows_refused', type: 'bigint', default: 0 })
  rowsRefused!: number;

  @Column({ name: 'rows_undone', type: 'bigint', default: 0 })
  rowsUndone!: number;

  @Column({ name: 'bytes_done', type: 'bigint', default: 0 })
  bytesDone!: number;

  /** Time of the earliest row stored. */
  @Column({ name: 'first_at', type: 'timestamptz', nullable: true })
  firstAt!: Date | null;

  /** Time of the latest row stored. */
  @Column({ name: 'last_at', type: 'timestamptz', nullable: true })
  lastAt!: Date | null;

  @Column({ type: 'text', nullable: true })
  error!: string | null;

  @Column({ name: 'created_by', type: 'uuid', nullable: true })
  @ForeignKey(() => User, { name: 'import_created_by_fkey', onDelete: 'SET NULL' })
  createdBy!: string | null;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;

  @Column({ name: 'started_at', type: 'timestamptz', nullable: true })
  startedAt!: Date | null;

  @Column({ name: 'finished_at', type: 'timestamptz', nullable: true })
  finishedAt!: Date | null;
}
