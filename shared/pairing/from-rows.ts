import type { DwellColumns, HeardOnlyColumns, SpotColumns, UnitColumns } from './columns.ts';

/** One spot; see `SpotColumns` for the units. */
export interface SpotRow {
  timeMs: number;
  receiver: number;
  call: number;
  band: number;
  freq100Hz: number;
  snrDb: number;
  /** 0 unless given. */
  uncertaintySeconds?: number;
  /** 0 (unknown) unless given. */
  speedWpm?: number;
}

/** Columns of a handful of spots, as worked examples and tests write them. */
export function spotColumns(rows: readonly SpotRow[]): SpotColumns {
  return {
    timeMs: Float64Array.from(rows, (row) => row.timeMs),
    receiver: Int32Array.from(rows, (row) => row.receiver),
    call: Int32Array.from(rows, (row) => row.call),
    band: Int16Array.from(rows, (row) => row.band),
    freq100Hz: Int32Array.from(rows, (row) => row.freq100Hz),
    snrDb: Int16Array.from(rows, (row) => row.snrDb),
    uncertaintySeconds: Uint8Array.from(rows, (row) => row.uncertaintySeconds ?? 0),
    speedWpm: Uint8Array.from(rows, (row) => row.speedWpm ?? 0),
  };
}

export type DwellRow = { [K in keyof DwellColumns]: number };

export function dwellColumns(rows: readonly DwellRow[]): DwellColumns {
  return {
    receiver: Int32Array.from(rows, (row) => row.receiver),
    antenna: Int32Array.from(rows, (row) => row.antenna),
    startMs: Float64Array.from(rows, (row) => row.startMs),
    endMs: Float64Array.from(rows, (row) => row.endMs),
  };
}

export type UnitRow = { [K in keyof UnitColumns]: number };
export type HeardOnlyRow = { [K in keyof HeardOnlyColumns]: number };

/** The columns as an array of rows: for tables and worked examples, not for a season. */
export function unitRowsOf(units: UnitColumns): UnitRow[] {
  return rowsOf(units, units.call.length);
}

export function heardOnlyRowsOf(heardOnly: HeardOnlyColumns): HeardOnlyRow[] {
  return rowsOf(heardOnly, heardOnly.call.length);
}

function rowsOf<T extends { [K in keyof T]: ArrayLike<number> }>(
  columns: T,
  n: number,
): { [K in keyof T]: number }[] {
  const names = Object.keys(columns) as (keyof T)[];
  return Array.from({ length: n }, (_, i) => {
    const row = {} as { [K in keyof T]: number };
    for (const name of names) row[name] = columns[name][i]!;
    return row;
  });
}
