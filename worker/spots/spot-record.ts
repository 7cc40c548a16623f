import type { SpotMode } from '../../shared/contracts/spot-mode.ts';

/** One spot on its way into the database. Both live feeds and files make these. */
export interface SpotRecord {
  /** UTC milliseconds since 1970. */
  heardAtMs: number;
  /** A receiver of the station. */
  receiverId: number;
  /** In capitals, 1 to 24 characters: the key under which a station heard is counted. */
  call: string;
  /** In steps of 100 Hz, a whole number above 0. */
  freq100Hz: number;
  bandMetres: number;
  /** Whole dB. */
  snrDb: number;
  speedWpm: number | null;
  mode: SpotMode;
  /** How long after `heardAtMs` the true time may lie: 0, or 60 where only the minute is known. */
  uncertaintySeconds: number;
  /** Minute of the UTC day that a live line carried, 0 to 1439; null for files. */
  feedMinute: number | null;
}
