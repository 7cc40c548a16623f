import { Check, Column, Entity, ForeignKey, PrimaryColumn } from 'typeorm';
import { Feed } from './feed.ts';

export type FeedState = 'connecting' | 'receiving' | 'silent' | 'lost' | 'off';

/** How a feed is doing; written by the worker only. Totals count since the feed was set up. */
@Entity('feed_health')
@ForeignKey(() => Feed, ['stationId', 'feedId'], ['stationId', 'id'], {
  name: 'feed_health_station_id_feed_id_fkey',
  onDelete: 'CASCADE',
})
@Check('feed_health_state_check', `state IN ('connecting', 'receiving', 'silent', 'lost', 'off')`)
export class FeedHealth {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  stationId!: number;

  @PrimaryColumn({ name: 'feed_id', type: 'integer' })
  feedId!: number;

  @Column({ type: 'text' })
  state!: FeedState;

  @Column({ name: 'connected_at', type: 'timestamptz', nullable: true })
  connectedAt!: Date | null;

  @Column({ name: 'last_line_at', type: 'timestamptz', nullable: true })
  lastLineAt!: Date | null;

  @Column({ name: 'lines_last_minute', type: 'integer', default: 0 })
  linesLastMinute!: number;

  @Column({ name: 'lines_total', type: 'bigint', default: 0 })
  linesTotal!: number;

  @Column({ name: 'stored_total', type: 'bigint', default: 0 })
  storedTotal!: number;

  /** Spots that were stored before: replays and repeats. */
  @Column({ name: 'doubled_total', type: 'bigint', default: 0 })
  doubledTotal!: number;

  @Column({ name: 'refused_total', type: 'bigint', default: 0 })
  refusedTotal!: number;

  /** Spots of receivers that are not the station's. */
  @Column({ name: 'other_receiver_total', type: 'bigint', default: 0 })
  otherReceiverTotal!: number;

  @Column({ name: 'last_error', type: 'text', nullable: true })
  lastError!: string | null;

  @Column({ name: 'updated_at', type: 'timestamptz', default: () => 'now()' })
  updatedAt!: Date;
}
