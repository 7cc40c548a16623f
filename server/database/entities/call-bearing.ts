import { Check, Column, Entity, ForeignKey, PrimaryColumn } from 'typeorm';
import { CallSign } from './call-sign.ts';
import { Station } from './station.ts';

export type BearingSource = 'locator' | 'call area' | 'country' | 'none';

/** Where a station believes a call to be, seen from its own antennas: a cache that can be made again. */
@Entity('call_bearing')
@Check('call_bearing_source_check', `source IN ('locator', 'call area', 'country', 'none')`)
export class CallBearing {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'call_bearing_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryColumn({ name: 'call_id', type: 'integer' })
  @ForeignKey(() => CallSign, { name: 'call_bearing_call_id_fkey' })
  callId!: number;

  @Column({ type: 'text', nullable: true })
  country!: string | null;

  @Column({ type: 'text' })
  source!: BearingSource;

  @Column({ name: 'latitude_deg', type: 'real', nullable: true })
  latitudeDeg!: number | null;

  @Column({ name: 'longitude_deg', type: 'real', nullable: true })
  longitudeDeg!: number | null;

  @Column({ name: 'radius_km', type: 'real', nullable: true })
  radiusKm!: number | null;

  /** Null when there is no bearing (maritime and aeronautical mobile). */
  @Column({ name: 'azimuth_deg', type: 'real', nullable: true })
  azimuthDeg!: number | null;

  @Column({ name: 'distance_km', type: 'real', nullable: true })
  distanceKm!: number | null;

  @Column({ name: 'spread_deg', type: 'real', nullable: true })
  spreadDeg!: number | null;
}
