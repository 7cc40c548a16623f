import { Check, Column, Entity, ForeignKey, Index, PrimaryColumn, PrimaryGeneratedColumn } from 'typeorm';
import { Station } from './station.ts';

export type AntennaKind = 'long wire' | 'loop' | 'vertical' | 'phased pair' | 'dipole' | 'other';

/** A receive antenna. Its name is unique at the station, whatever the letters' case. */
@Entity('antenna')
@Index('antenna_name', { synchronize: false })
@Check('antenna_kind_check', `kind IN ('long wire', 'loop', 'vertical', 'phased pair', 'dipole', 'other')`)
@Check('antenna_heading_deg_check', `heading_deg >= 0 AND heading_deg < 360`)
@Check('antenna_beamwidth_deg_check', `beamwidth_deg > 0 AND beamwidth_deg <= 360`)
@Check('antenna_length_m_check', `length_m > 0`)
@Check('antenna_height_m_check', `height_m >= 0`)
@Check(
  'antenna_check',
  `in_service_to IS NULL OR in_service_from IS NULL OR in_service_to >= in_service_from`,
)
export class Antenna {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'antenna_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryGeneratedColumn('identity', { type: 'integer', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ type: 'text' })
  name!: string;

  /** What tells it apart on screen besides its colour. */
  @Column({ type: 'text' })
  marker!: string;

  @Column({ type: 'text' })
  kind!: AntennaKind;

  /** Clockwise from true north; null when it has no favoured direction. */
  @Column({ name: 'heading_deg', type: 'real', nullable: true })
  headingDeg!: number | null;

  @Column({ name: 'beamwidth_deg', type: 'real', nullable: true })
  beamwidthDeg!: number | null;

  @Column({ name: 'length_m', type: 'real', nullable: true })
  lengthM!: number | null;

  @Column({ name: 'height_m', type: 'real', nullable: true })
  heightM!: number | null;

  @Column({ type: 'text', default: '' })
  notes!: string;

  /** `YYYY-MM-DD`, first day of use. */
  @Column({ name: 'in_service_from', type: 'date', nullable: true })
  inServiceFrom!: string | null;

  /** `YYYY-MM-DD`, last day of use. */
  @Column({ name: 'in_service_to', type: 'date', nullable: true })
  inServiceTo!: string | null;

  @Column({ name: 'created_at', type: 'timestamptz', default: () => 'now()' })
  createdAt!: Date;
}
