import { Column, Entity, ForeignKey, PrimaryColumn } from 'typeorm';
import { ImportRecord } from './import-record.ts';

/** A line of a file that was not stored, and why. */
@Entity('import_refusal')
@ForeignKey(() => ImportRecord, ['stationId', 'importId'], ['stationId', 'id'], {
  name: 'import_refusal_station_id_import_id_fkey',
  onDelete: 'CASCADE',
})
export class ImportRefusal {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  stationId!: number;

  @PrimaryColumn({ name: 'import_id', type: 'integer' })
  importId!: number;

  @PrimaryColumn({ name: 'line_no', type: 'bigint' })
  lineNo!: number;

  /** The field at fault; null when the whole line is. */
  @Column({ type: 'text', nullable: true })
  field!: string | null;

  @Column({ type: 'text' })
  reason!: string;

  @Column({ type: 'text' })
  raw!: string;
}
