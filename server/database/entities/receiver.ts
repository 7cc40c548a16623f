import { Column, Entity, ForeignKey, Index, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import { Station } from './station.ts';

/** A receiver whose spots the station collects; its antenna at any time stands in the switch log. */
@Entity('receiver')
@Index('receiver_call_sign', ['stationId', 'callSign'], { unique: true })
export class Receiver {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'receiver_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryGeneratedColumn('identity', { type: 'integer', generatedIdentity: 'ALWAYS' })
  id!: number;

  /** As it stands in the feed's lines. */
  @Column({ name: 'call_sign', type: 'text' })
  callSign!: string;

  @Column({ type: 'text' })
  label!: string;

  @Column({ type: 'text', default: '' })
  notes!: string;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;

  @Column({ name: 'retired_at', type: 'timestamptz', nullable: true })
  retiredAt!: Date | null;
}
