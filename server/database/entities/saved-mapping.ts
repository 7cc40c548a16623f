import { Check, Column, Entity, ForeignKey, Index, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import type { ImportKind } from '../../../shared/contracts/import.ts';
import { Station } from './station.ts';
import { User } from './user.ts';

/** How a file's columns are read, saved under a name unique at the station whatever the letters' case. */
@Entity('saved_mapping')
@Index('saved_mapping_name', { synchronize: false })
@Check('saved_mapping_kind_check', `kind IN ('spots', 'dwells')`)
export class SavedMapping {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'saved_mapping_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryGeneratedColumn('identity', { type: 'integer', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ type: 'text' })
  kind!: ImportKind;

  @Column({ type: 'text' })
  name!: string;

  /** Parsed with its contract when read: it may have been written by an earlier release. */
  @Column({ type: 'jsonb' })
  mapping!: Record<string, unknown>;

  @Column({ name: 'created_by', type: 'uuid', nullable: true })
  @ForeignKey(() => User, { name: 'saved_mapping_created_by_fkey', onDelete: 'SET NULL' })
  createdBy!: string | null;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;
}
