import { Column, Entity, Index, PrimaryGeneratedColumn } from 'typeorm';

/** The dictionary of call signs as heard; the same for all stations, written once per call. */
@Entity('call_sign')
@Index('call_sign_call', ['call'], { unique: true })
export class CallSign {
  @PrimaryGeneratedColumn('identity', { type: 'integer', generatedIdentity: 'ALWAYS' })
  id!: number;

  @Column({ type: 'text', collation: 'C' })
  call!: string;
}
