import { Column, Entity, ForeignKey, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import { Feed } from './feed.ts';

/** A line of a feed that was not stored, and why. */
@Entity('feed_refusal')
@ForeignKey(() => Feed, ['stationId', 'feedId'], ['stationId', 'id'], {
  name: 'feed_refusal_station_id_feed_id_fkey',
  onDelete: 'CASCADE',
})
export class FeedRefusal {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  stationId!: number;

  @PrimaryColumn({ name: 'feed_id', type: 'integer' })
  feedId!: number;

  @PrimaryGeneratedColumn('identity', { type: 'bigint', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ name: 'received_at', type: 'timestamptz' })
  receivedAt!: Date;

  @Column({ type: 'text' })
  reason!: string;

  @Column({ type: 'text' })
  raw!: string;
}
