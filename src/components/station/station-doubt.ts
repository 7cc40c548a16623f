import type { Antenna } from '../../../shared/contracts/antenna.ts';
import type { Feed } from '../../../shared/contracts/feed.ts';

/** What is asked about before it is done. */
export type Doubt =
  | { kind: 'retire'; antenna: Antenna }
  | { kind: 'remove'; antenna: Antenna }
  | { kind: 'remove feed'; feed: Feed };
