import type { DwellIndex } from './dwell-index.ts';

/**
 * The spots of one station on one band that are free to make units, in order of time. The arrays are
 * scratch space, reused for the next group: only the first `length` entries hold.
 */
export interface Group {
  call: number;
  band: number;
  length: number;
  timeMs: Float64Array;
  side: Int32Array;
  freq100Hz: Int32Array;
  snrDb: Int32Array;
  speedWpm: Uint8Array;
}

export function emptyGroup(capacity: number): Group {
  return {
    call: 0,
    band: 0,
    length: 0,
    timeMs: new Float64Array(capacity),
    side: new Int32Array(capacity),
    freq100Hz: new Int32Array(capacity),
    snrDb: new Int32Array(capacity),
    speedWpm: new Uint8Array(capacity),
  };
}

/** The sides (receiver and antenna) with antennas numbered densely, ascending by id. */
export interface Sides {
  receiver: Int32Array;
  /** Side -> dense antenna number. */
  antenna: Int32Array;
  /** Dense antenna number -> antenna id, ascending. */
  antennas: Int32Array;
}

export function numberSides(index: DwellIndex): Sides {
  const antennas = Int32Array.from(new Set(index.sides.antenna)).sort();
  const numberOf = new Map<number, number>();
  antennas.forEach((id, number) => numberOf.set(id, number));
  return {
    receiver: index.sides.receiver,
    antenna: index.sides.antenna.map((id) => numberOf.get(id)!),
    antennas,
  };
}
