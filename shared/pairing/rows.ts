import type { HeardOnlyColumns, UnitColumns } from './columns.ts';
import type { HeardOnlyRow } from './from-rows.ts';
import { differenceOfMeans } from './columns.ts';
import { orderByKey } from './order.ts';

type TypedColumn = Int32Array | Int16Array | Uint8Array | Uint16Array | Float64Array;

/** Largest count that a row's 16-bit count column holds. */
const MOST_SPOTS = 65_535;

export function emptyUnits(n: number): UnitColumns {
  return {
    antennaA: new Int32Array(n),
    antennaB: new Int32Array(n),
    call: new Int32Array(n),
    band: new Int16Array(n),
    blockMinute: new Int32Array(n),
    receiverA: new Int32Array(n),
    receiverB: new Int32Array(n),
    kind: new Uint8Array(n),
    differenceDb: new Float64Array(n),
    countA: new Uint16Array(n),
    countB: new Uint16Array(n),
    sumSnrA: new Int32Array(n),
    sumSnrB: new Int32Array(n),
    speedWpm: new Uint8Array(n),
  };
}

export function emptyHeardOnly(n: number): HeardOnlyColumns {
  return {
    antennaA: new Int32Array(n),
    antennaB: new Int32Array(n),
    call: new Int32Array(n),
    band: new Int16Array(n),
    blockMinute: new Int32Array(n),
    side: new Uint8Array(n),
    receiverA: new Int32Array(n),
    receiverB: new Int32Array(n),
    count: new Uint16Array(n),
    sumSnr: new Int32Array(n),
  };
}

/** Where rows are added one by one; `finish` gives columns of the exact length. */
export interface UnitRows {
  /** Adds a row with empty sums and returns its number. Fields are dense antenna numbers and ids. */
  open(row: {
    antennaA: number;
    antennaB: number;
    call: number;
    band: number;
    blockMinute: number;
    receiverA: number;
    receiverB: number;
    kind: number;
  }): number;
  /** Adds spots to one side of a row; speeds of 0 count as unknown. */
  addA(row: number, count: number, sumSnr: number): void;
  addB(row: number, count: number, sumSnr: number): void;
  addSpeed(row: number, knownSpeeds: number, sumWpm: number): void;
  /** Throws RangeError when a side of a row holds more than 65,535 spots. */
  finish(antennas: Int32Array): UnitColumns;
}

export function unitRows(): UnitRows {
  let capacity = 1024;
  let length = 0;
  let columns = emptyUnits(capacity);
  let sums = emptySums(capacity);

  return {
    open(row) {
      if (length === capacity) {
        capacity *= 2;
        columns = copied(columns, emptyUnits(capacity));
        sums = copied(sums, emptySums(capacity));
      }
      columns.antennaA[length] = row.antennaA;
      columns.antennaB[length] = row.antennaB;
      columns.call[length] = row.call;
      columns.band[length] = row.band;
      columns.blockMinute[length] = row.blockMinute;
      columns.receiverA[length] = row.receiverA;
      columns.receiverB[length] = row.receiverB;
      columns.kind[length] = row.kind;
      return length++;
    },
    addA(row, count, sumSnr) {
      sums.countA[row]! += count;
      columns.sumSnrA[row]! += sumSnr;
    },
    addB(row, count, sumSnr) {
      sums.countB[row]! += count;
      columns.sumSnrB[row]! += sumSnr;
    },
    addSpeed(row, knownSpeeds, sumWpm) {
      sums.speeds[row]! += knownSpeeds;
      sums.sumWpm[row]! += sumWpm;
    },
    finish(antennas) {
      for (let i = 0; i < length; i++) {
        const countA = sums.countA[i]!;
        const countB = sums.countB[i]!;
        if (countA > MOST_SPOTS || countB > MOST_SPOTS) throw tooManySpots(columns.call[i]!);
        columns.countA[i] = countA;
        columns.countB[i] = countB;
        columns.differenceDb[i] = differenceOfMeans(columns.sumSnrA[i]!, countA, columns.sumSnrB[i]!, countB);
        columns.speedWpm[i] = sums.speeds[i]! > 0 ? Math.round(sums.sumWpm[i]! / sums.speeds[i]!) : 0;
      }
      return groupedUnits(columns, length, antennas);
    },
  };
}

function emptySums(n: number) {
  return {
    countA: new Int32Array(n),
    countB: new Int32Array(n),
    speeds: new Int32Array(n),
    sumWpm: new Int32Array(n),
  };
}

export interface HeardOnlyRows {
  /** Takes dense antenna numbers. */
  add(row: HeardOnlyRow): void;
  finish(antennas: Int32Array): HeardOnlyColumns;
}

export function heardOnlyRows(): HeardOnlyRows {
  let capacity = 1024;
  let length = 0;
  let columns = emptyHeardOnly(capacity);
  return {
    /** Throws RangeError for more than 65,535 spots in one row. */
    add(row) {
      if (row.count > MOST_SPOTS) throw tooManySpots(row.call);
      if (length === capacity) {
        capacity *= 2;
        columns = copied(columns, emptyHeardOnly(capacity));
      }
      columns.antennaA[length] = row.antennaA;
      columns.antennaB[length] = row.antennaB;
      columns.call[length] = row.call;
      columns.band[length] = row.band;
      columns.blockMinute[length] = row.blockMinute;
      columns.side[length] = row.side;
      columns.receiverA[length] = row.receiverA;
      columns.receiverB[length] = row.receiverB;
      columns.count[length] = row.count;
      columns.sumSnr[length] = row.sumSnr;
      length++;
    },
    finish: (antennas) => groupedHeardOnly(columns, length, antennas),
  };
}

function tooManySpots(call: number): RangeError {
  return new RangeError(`More than ${MOST_SPOTS} spots of call ${call} on one band in one block.`);
}

function copied<T extends { [K in keyof T]: TypedColumn }>(from: T, to: T): T {
  for (const name of Object.keys(to) as (keyof T)[]) (to[name] as TypedColumn).set(from[name] as TypedColumn);
  return to;
}

/** Order in which the rows of one antenna pair stand together. */
function orderByPair(
  rows: UnitColumns | HeardOnlyColumns,
  length: number,
  antennas: Int32Array,
): Uint32Array {
  const pair = new Uint32Array(length);
  for (let i = 0; i < length; i++) pair[i] = rows.antennaA[i]! * antennas.length + rows.antennaB[i]!;
  return orderByKey(pair, antennas.length * antennas.length);
}

// The two loops below name each column: a helper that took any typed array ran ten times as long,
// since the engine cannot settle on one width for its reads.

/** The rows grouped by antenna pair, antenna numbers turned into ids. */
function groupedUnits(rows: UnitColumns, length: number, antennas: Int32Array): UnitColumns {
  const order = orderByPair(rows, length, antennas);
  const grouped = emptyUnits(length);
  for (let i = 0; i < length; i++) {
    const row = order[i]!;
    grouped.antennaA[i] = antennas[rows.antennaA[row]!]!;
    grouped.antennaB[i] = antennas[rows.antennaB[row]!]!;
    grouped.call[i] = rows.call[row]!;
    grouped.band[i] = rows.band[row]!;
    grouped.blockMinute[i] = rows.blockMinute[row]!;
    grouped.receiverA[i] = rows.receiverA[row]!;
    grouped.receiverB[i] = rows.receiverB[row]!;
    grouped.kind[i] = rows.kind[row]!;
    grouped.differenceDb[i] = rows.differenceDb[row]!;
    grouped.countA[i] = rows.countA[row]!;
    grouped.countB[i] = rows.countB[row]!;
    grouped.sumSnrA[i] = rows.sumSnrA[row]!;
    grouped.sumSnrB[i] = rows.sumSnrB[row]!;
    grouped.speedWpm[i] = rows.speedWpm[row]!;
  }
  return grouped;
}

function groupedHeardOnly(rows: HeardOnlyColumns, length: number, antennas: Int32Array): HeardOnlyColumns {
  const order = orderByPair(rows, length, antennas);
  const grouped = emptyHeardOnly(length);
  for (let i = 0; i < length; i++) {
    const row = order[i]!;
    grouped.antennaA[i] = antennas[rows.antennaA[row]!]!;
    grouped.antennaB[i] = antennas[rows.antennaB[row]!]!;
    grouped.call[i] = rows.call[row]!;
    grouped.band[i] = rows.band[row]!;
    grouped.blockMinute[i] = rows.blockMinute[row]!;
    grouped.side[i] = rows.side[row]!;
    grouped.receiverA[i] = rows.receiverA[row]!;
    grouped.receiverB[i] = rows.receiverB[row]!;
    grouped.count[i] = rows.count[row]!;
    grouped.sumSnr[i] = rows.sumSnr[row]!;
  }
  return grouped;
}
