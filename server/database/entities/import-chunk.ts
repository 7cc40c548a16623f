import { Column, Entity, ForeignKey, PrimaryColumn } from 'typeorm';
import { ImportRecord } from './import-record.ts';

/** A piece of the raw upload, gzip-compressed, so that neither process ever holds a whole file. */
@Entity('import_chunk')
@ForeignKey(() => ImportRecord, ['stationId', 'importId'], ['stationId', 'id'], {
  name: 'import_chunk_station_id_import_id_fkey',
  onDelete: 'CASCADE',
})
export class ImportChunk {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  stationId!: number;

  @PrimaryColumn({ name: 'import_id', type: 'integer' })
  importId!: number;

  /** In the file's order. */
  @PrimaryColumn({ name: 'chunk_no', type: 'integer' })
  chunkNo!: number;

  @Column({ type: 'bytea' })
  data!: Buffer;
}
