import type { Antenna, Feed } from '../../../shared/contracts/station.ts';

/** What is asked about before it is done. */
export type Doubt =
  | { kind: 'retire'; antenna: Antenna }
  | { kind: 'remove'; antenna: Antenna }
  | { kind: 'remove feed'; feed: Feed };
