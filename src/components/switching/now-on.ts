import type { Dwell } from '../../../shared/contracts/dwell.ts';
import type { Antenna } from '../../../shared/contracts/antenna.ts';
import type { Receiver } from '../../../shared/contracts/receiver.ts';

/** What a receiver's panel shows. `dwell` undefined: not known (yet). */
export interface NowOnReceiver {
  receiver: Pick<Receiver, 'id' | 'label' | 'callSign'>;
  dwell: Dwell | null | undefined;
}

/** A switch as a person asks for it; `at` null: now. */
export interface SwitchRequest {
  receiverId: number;
  antennaId: number | null;
  at: string | null;
}

/** What became of the last switch of one receiver, for the line below its buttons. */
export interface SwitchOutcome {
  /** A sentence: what was logged, or that nothing had to be. */
  words: string;
  warning: string | null;
  /** Whether it can be taken back from here, still. */
  canUndo: boolean;
}

/** The antennas to offer: in service on the day, and whatever a receiver is on, even so. */
export function offeredAntennas(
  antennas: readonly Antenna[],
  today: string,
  inUse: ReadonlySet<number>,
): Antenna[] {
  return antennas
    .filter(
      ({ id, inServiceFrom, inServiceTo }) =>
        inUse.has(id) ||
        ((inServiceFrom === null || inServiceFrom <= today) &&
          (inServiceTo === null || inServiceTo >= today)),
    )
    .sort((one, other) => one.marker.localeCompare(other.marker) || one.id - other.id);
}
