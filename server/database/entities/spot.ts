import { Check, Column, Entity, Index, PrimaryColumn } from 'typeorm';

/**
 * One spot, narrow on purpose: integers only. The table is partitioned by month of `heardAt` (the function
 * `ensure_spot_partitions` makes the months) and has no primary key; to TypeORM its unique key is one.
 *
 * The antenna is not here: it is derived from the switch log (view `tagged_spot`). Left out of schema
 * comparison by TypeORM, which knows no partitions; the drift check compares its columns by itself.
 */
@Entity({ name: 'spot', synchronize: false })
@Index('spot_station_id_heard_at_receiver_id_call_id_freq_100hz_key', { synchronize: false })
@Check('spot_heard_ms_check', `heard_ms BETWEEN 0 AND 999`)
@Check('spot_feed_minute_check', `feed_minute BETWEEN 0 AND 1439`)
export class Spot {
  /** The whole second; a spot equal in station, receiver, second, call and frequency is the same spot. */
  @PrimaryColumn({ name: 'heard_at', type: 'timestamptz' })
  heardAt!: Date;

  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  stationId!: number;

  @PrimaryColumn({ name: 'receiver_id', type: 'integer' })
  receiverId!: number;

  @PrimaryColumn({ name: 'call_id', type: 'integer' })
  callId!: number;

  @PrimaryColumn({ name: 'freq_100hz', type: 'integer' })
  freq100hz!: number;

  /** 0 = heard live. */
  @Column({ name: 'import_id', type: 'integer' })
  importId!: number;

  /** Milliseconds past `heardAt`, 0 to 999. */
  @Column({ name: 'heard_ms', type: 'smallint' })
  heardMs!: number;

  @Column({ name: 'band_m', type: 'smallint' })
  bandM!: number;

  @Column({ name: 'snr_db', type: 'smallint' })
  snrDb!: number;

  @Column({ name: 'speed_wpm', type: 'smallint', nullable: true })
  speedWpm!: number | null;

  @Column({ type: 'smallint' })
  mode!: number;

  /** How far the true time may lie from the one stored. */
  @Column({ name: 'uncertainty_s', type: 'smallint' })
  uncertaintyS!: number;

  /** Minute of the UTC day that the feed's line carried, 0 to 1439. */
  @Column({ name: 'feed_minute', type: 'smallint', nullable: true })
  feedMinute!: number | null;
}
