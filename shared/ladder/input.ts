import type { CallFacts, ComparedAntenna } from '../comparison/index.ts';
import type { PairingRulesInput } from '../contracts/comparison.ts';
import type { LadderQuestion } from '../contracts/ladder.ts';
import type { UnitColumns } from '../pairing/index.ts';

export interface LadderAntennaFacts extends ComparedAntenna {
  inService: boolean;
}

export interface LadderReceiverFacts {
  id: number;
  callSign: string;
  label: string;
  retired: boolean;
}

/** Everything a ladder is made of. Pure data: the same input gives the same ladder. */
export interface LadderInput {
  question: LadderQuestion;
  /** All antennas of the station, also those without a unit. */
  antennas: LadderAntennaFacts[];
  receivers: LadderReceiverFacts[];
  rules: PairingRulesInput;
  marginDb: number;
  sectorCount: number;
  station: { latitude: number; longitude: number };
  /** Units of all pairs and bands over the nights asked for. */
  units: UnitColumns;
  /** By call id. */
  calls: ReadonlyMap<number, CallFacts>;
}
