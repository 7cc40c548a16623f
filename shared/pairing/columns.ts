/**
 * The typed-array columns that go into and come out of pairing. A row is one index across all columns
 * of a struct; every column of a struct has the same length.
 */

/** Spots as the receivers reported them, in any order. */
export interface SpotColumns {
  /** When it was heard, UTC, milliseconds since 1970. */
  timeMs: Float64Array;
  /** Receiver id. */
  receiver: Int32Array;
  /** Call sign id of the dictionary, 0 or more. */
  call: Int32Array;
  /** Band, as the rest of the program numbers bands. */
  band: Int16Array;
  /** Frequency in steps of 100 Hz, an integer, so that tolerances are compared exactly. */
  freq100Hz: Int32Array;
  snrDb: Int16Array;
  /** 0 for a time known to the second; 60 for a time known only to the minute. */
  uncertaintySeconds: Uint8Array;
  /** Morse speed in words per minute; 0 when unknown. */
  speedWpm: Uint8Array;
}

/** Dwells `[startMs, endMs)`, in any order. `endMs` may be Infinity for a dwell that is still open. */
export interface DwellColumns {
  receiver: Int32Array;
  /** Antenna id, 1 or more (0 means "no antenna" in answers). */
  antenna: Int32Array;
  startMs: Float64Array;
  endMs: Float64Array;
}

/** `UnitColumns.kind`: two receivers heard the station at the same moment. */
export const SIMULTANEOUS = 0;
/** `UnitColumns.kind`: one receiver heard the station on both antennas within the block. */
export const ALTERNATING = 1;

/**
 * Units: one station (call) on one band in one block, heard on antenna A and on antenna B. Antenna A
 * always has the lower id. Sums and counts are kept, not means: they are exact integers.
 */
export interface UnitColumns {
  antennaA: Int32Array;
  antennaB: Int32Array;
  call: Int32Array;
  band: Int16Array;
  /** Start of the block, minutes since 1970 UTC. */
  blockMinute: Int32Array;
  receiverA: Int32Array;
  /** Equal to `receiverA` in an alternating unit. */
  receiverB: Int32Array;
  /** `SIMULTANEOUS` or `ALTERNATING`. */
  kind: Uint8Array;
  /** Mean SNR on A minus mean SNR on B, dB: above zero when A hears better. */
  differenceDb: Float64Array;
  /** Spots of A's side in the unit; in a simultaneous unit both counts are the number of matches. */
  countA: Uint16Array;
  countB: Uint16Array;
  /** Sum of the SNRs of A's side, dB: divide by `countA` for the mean. */
  sumSnrA: Int32Array;
  sumSnrB: Int32Array;
  /** Mean Morse speed of both sides in words per minute, rounded; 0 when no spot carried one. */
  speedWpm: Uint8Array;
}

/** `HeardOnlyColumns.side`: heard on antenna A, not on B. */
export const HEARD_ON_A = 0;
/** `HeardOnlyColumns.side`: heard on antenna B, not on A. */
export const HEARD_ON_B = 1;

/** Stations heard on one antenna of a pair in a block and not on the other, though both listened. */
export interface HeardOnlyColumns {
  antennaA: Int32Array;
  antennaB: Int32Array;
  call: Int32Array;
  band: Int16Array;
  /** Start of the block, minutes since 1970 UTC. */
  blockMinute: Int32Array;
  /** `HEARD_ON_A` or `HEARD_ON_B`. */
  side: Uint8Array;
  /**
   * The receiver on each side. On the side that heard: the one with most spots. On the side that did
   * not: the one that listened longest on that antenna in the block; its limit is what the station
   * stayed under. Ties go to the lower id.
   */
  receiverA: Int32Array;
  receiverB: Int32Array;
  /** Spots heard on the one side, over all its receivers. */
  count: Uint16Array;
  /** Sum of their SNRs, dB: divide by `count` for the mean. */
  sumSnr: Int32Array;
}

/** How the spots of the window were tagged, one row per receiver, antenna and band that has any. */
export interface TagTally {
  receiver: number;
  /** 0 for spots without a dwell. */
  antenna: number;
  band: number;
  /** Spots free to make units. */
  tagged: number;
  guarded: number;
  /** Counted in the rows of antenna 0 only. */
  untagged: number;
}

/** Tagged spots of one receiver on one band by their SNR. */
export interface SnrLevels {
  receiver: number;
  band: number;
  /** SNR of the first count, dB. */
  lowestDb: number;
  /** Spots at `lowestDb`, one decibel above it, and so on. */
  spots: number[];
}

/** Time that a receiver listened on an antenna in a block, guards left out. */
export interface ListeningColumns {
  receiver: Int32Array;
  antenna: Int32Array;
  blockMinute: Int32Array;
  seconds: Float64Array;
}

export interface PairingResult {
  /** Rows of one antenna pair stand together, pairs ascending by (A, B). */
  units: UnitColumns;
  /** Grouped as `units`. */
  heardOnly: HeardOnlyColumns;
  tallies: TagTally[];
  levels: SnrLevels[];
  /** Spots left out because another one equals them in receiver, second, call and frequency. */
  doubles: number;
  /** Matches over all antenna pairs: the sum of `countA` over the simultaneous units. */
  matches: number;
  listening: ListeningColumns;
}

/** Half-open stretch of time, UTC milliseconds since 1970, both finite. */
export interface PairingWindow {
  startMs: number;
  endMs: number;
}

/**
 * Mean difference in dB from the exact sums. With equal counts (every simultaneous unit) one division
 * is enough and is correctly rounded.
 */
export function differenceOfMeans(sumA: number, countA: number, sumB: number, countB: number): number {
  return countA === countB ? (sumA - sumB) / countA : sumA / countA - sumB / countB;
}

/** Throws RangeError when the columns of a struct differ in length; returns that length. */
export function sharedLength(name: string, columns: Record<string, { length: number }>): number {
  let length = -1;
  for (const [column, values] of Object.entries(columns)) {
    if (length === -1) length = values.length;
    else if (values.length !== length) {
      throw new RangeError(
        `${name}.${column} has ${values.length} rows, the other columns have ${length}: all must have the same.`,
      );
    }
  }
  return Math.max(length, 0);
}
