import { Check, Column, Entity, ForeignKey, PrimaryColumn } from 'typeorm';
import { Station } from './station.ts';

/**
 * The units of one antenna pair (`antennaA` < `antennaB`) and night under one set of rules, packed as in
 * shared/pairing/pack.ts. A cache that can always be made again from spots and dwells.
 */
@Entity('unit_pack')
@Check('unit_pack_check', `antenna_a <= antenna_b`)
export class UnitPack {
  @PrimaryColumn({ name: 'station_id', type: 'integer' })
  @ForeignKey(() => Station, { name: 'unit_pack_station_id_fkey', onDelete: 'CASCADE' })
  stationId!: number;

  /** The rules that the units were made under, as readable text (shared/pairing/rules.ts). */
  @PrimaryColumn({ name: 'rules_key', type: 'text' })
  rulesKey!: string;

  @PrimaryColumn({ name: 'antenna_a', type: 'integer' })
  antennaA!: number;

  @PrimaryColumn({ name: 'antenna_b', type: 'integer' })
  antennaB!: number;

  /** `YYYY-MM-DD`. */
  @PrimaryColumn({ type: 'date' })
  night!: string;

  @Column({ name: 'unit_count', type: 'integer' })
  unitCount!: number;

  @Column({ name: 'heard_only_count', type: 'integer' })
  heardOnlyCount!: number;

  @Column({ type: 'bytea' })
  units!: Buffer;

  @Column({ name: 'heard_only', type: 'bytea' })
  heardOnly!: Buffer;

  @Column({ name: 'made_at', type: 'timestamptz', default: () => 'now()' })
  madeAt!: Date;
}
