import { Column, Entity, ForeignKey, PrimaryColumn } from 'typeorm';
import { Station } from './station.ts';

/** A night made under a set of rules, and what was left out of it and why. */
@Entity('unit_night')
export class UnitNight {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'unit_night_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  @PrimaryColumn({ name: 'rules_key', type: 'text' })
  rulesKey!: string;

  /** `YYYY-MM-DD`. */
  @PrimaryColumn({ type: 'date' })
  night!: string;

  @Column({ type: 'integer' })
  spots!: number;

  @Column({ type: 'jsonb' })
  tally!: Record<string, unknown>;

  @Column({ name: 'made_at', type: 'timestamptz', default: () => 'now()' })
  madeAt!: Date;
}
