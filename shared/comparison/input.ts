import type { ComparisonQuestion, PairingRulesInput } from '../contracts/comparison.ts';
import type { HeardOnlyColumns, SnrLevels, UnitColumns } from '../pairing/index.ts';

/** Where a call is, seen from the station. Null: no bearing (maritime mobile, unknown prefix). */
export interface CallFacts {
  call: string;
  country: string | null;
  azimuthDeg: number | null;
  /** How far the azimuth could be off, over the circle of the position's uncertainty. */
  spreadDeg: number | null;
  distanceKm: number | null;
}

export interface ComparedAntenna {
  id: number;
  name: string;
  marker: string;
  headingDeg: number | null;
}

/** What was left out of the nights asked for, counted when their units were made. */
export interface NightTally {
  /** Spots by receiver, antenna (0: no dwell) and band. */
  spots: {
    receiver: number;
    antenna: number;
    band: number;
    tagged: number;
    guarded: number;
    untagged: number;
  }[];
  doubles: number;
  levels: SnrLevels[];
  /** Seconds that a receiver listened on an antenna outside guards. */
  listening: { receiver: number; antenna: number; seconds: number }[];
}

/** Everything an answer is made of. Pure data: the same input gives the same answer, here and in the browser. */
export interface ComparisonInput {
  question: ComparisonQuestion;
  antennas: { a: ComparedAntenna; b: ComparedAntenna };
  receivers: { id: number; callSign: string }[];
  rules: PairingRulesInput;
  marginDb: number;
  sectorCount: number;
  station: { latitude: number; longitude: number };
  /**
   * Units of the two antennas over the nights asked for, antenna A being the lower id as they are stored; and
   * those that two receivers on one and the same antenna made, whichever it was: they tell receivers apart.
   */
  units: UnitColumns;
  heardOnly: HeardOnlyColumns;
  /** By call id. */
  calls: ReadonlyMap<number, CallFacts>;
  nights: NightTally[];
}
