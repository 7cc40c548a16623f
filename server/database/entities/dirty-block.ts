import { Column, Entity, ForeignKey, PrimaryColumn } from 'typeorm';
import { Station } from './station.ts';

/** An hour whose spots or dwells changed since its units were made; every block length divides the hour. */
@Entity('dirty_block')
export class DirtyBlock {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'dirty_block_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryColumn({ name: 'starts_at', type: 'timestamptz' })
  startsAt!: Date;

  @Column({ name: 'marked_at', type: 'timestamptz', default: () => 'now()' })
  markedAt!: Date;
}
