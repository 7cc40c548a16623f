import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { differenceOfMeans, type HeardOnlyColumns, type UnitColumns } from './columns.ts';
import { heardOnlyRowsOf, unitRowsOf, type HeardOnlyRow, type UnitRow } from './from-rows.ts';
import { packHeardOnly, packUnits, unpackHeardOnly, unpackUnits } from './pack.ts';
import { emptyHeardOnly, emptyUnits } from './rows.ts';

const BLOCK_MINUTES = 15;
const FIRST_BLOCK = 29_459_520; // 2026-01-05T12:00Z in minutes since 1970

function columnsFrom<T extends UnitColumns | HeardOnlyColumns>(
  empty: T,
  rows: readonly { [K in keyof T]: number }[],
): T {
  rows.forEach((row, i) => {
    for (const name of Object.keys(empty) as (keyof T)[]) (empty[name] as Int32Array)[i] = row[name];
  });
  return empty;
}
const unitsFrom = (rows: UnitRow[]) => columnsFrom(emptyUnits(rows.length), rows);
const heardOnlyFrom = (rows: HeardOnlyRow[]) => columnsFrom(emptyHeardOnly(rows.length), rows);

const id = fc.oneof(fc.integer({ min: 1, max: 5 }), fc.constantFrom(70_000, 2_147_483_647));
const shared = {
  call: id,
  band: fc.constantFrom(160, 80, 40, 2200),
  blockMinute: fc.integer({ min: 0, max: 95 }).map((block) => FIRST_BLOCK + block * BLOCK_MINUTES),
  receiverA: id,
  receiverB: id,
};
const spots = fc.oneof(fc.integer({ min: 1, max: 40 }), fc.constant(65_535));
const unitArbitrary = fc
  .record({
    ...shared,
    kind: fc.constantFrom(0, 1),
    countA: spots,
    countB: spots,
    sumSnrA: fc.integer({ min: -100_000, max: 3_000_000 }),
    sumSnrB: fc.integer({ min: -100_000, max: 3_000_000 }),
    speedWpm: fc.integer({ min: 0, max: 255 }),
  })
  .map((row) => ({
    ...row,
    differenceDb: differenceOfMeans(row.sumSnrA, row.countA, row.sumSnrB, row.countB),
  }));
const heardOnlyArbitrary = fc.record({
  ...shared,
  side: fc.constantFrom(0, 1),
  count: spots,
  sumSnr: fc.integer({ min: -100_000, max: 3_000_000 }),
});

/** Rows of a few antenna pairs, grouped by pair. */
function ofPairs<T>(row: fc.Arbitrary<T>) {
  const pairs = [
    [1, 2],
    [1, 3],
    [2, 900_000],
  ] as const;
  return fc
    .tuple(...pairs.map(() => fc.array(row, { maxLength: 12 })))
    .map((groups) =>
      groups.flatMap((rows, k) =>
        rows.map((own) => ({ ...own, antennaA: pairs[k]![0], antennaB: pairs[k]![1] })),
      ),
    );
}

function oneUnit(change: Partial<UnitRow> = {}): UnitRow {
  return {
    antennaA: 1,
    antennaB: 2,
    call: 7,
    band: 160,
    blockMinute: FIRST_BLOCK + 30,
    receiverA: 3,
    receiverB: 4,
    kind: 0,
    differenceDb: 2.5,
    countA: 2,
    countB: 2,
    sumSnrA: 45,
    sumSnrB: 40,
    speedWpm: 27,
    ...change,
  };
}

describe('packUnits and unpackUnits', () => {
  it('give every unit back exactly, pair by pair', () => {
    fc.assert(
      fc.property(ofPairs(unitArbitrary), (rows) => {
        const packs = packUnits(unitsFrom(rows), BLOCK_MINUTES);
        expect(unitRowsOf(unpackUnits(packs.map((pack) => pack.data)))).toEqual(unitRowsOf(unitsFrom(rows)));
        for (const pack of packs) {
          const own = rows.filter((row) => row.antennaA === pack.antennaA && row.antennaB === pack.antennaB);
          expect(pack.count).toBe(own.length);
          expect(unitRowsOf(unpackUnits([pack.data]))).toEqual(unitRowsOf(unitsFrom(own)));
        }
      }),
    );
  });

  it('read a pack that starts at an odd address, as a database driver hands it out', () => {
    const rows = [oneUnit(), oneUnit({ call: 8, blockMinute: FIRST_BLOCK, kind: 1 })];
    const { data } = packUnits(unitsFrom(rows), BLOCK_MINUTES)[0]!;
    for (const shift of [1, 2, 3, 4]) {
      const moved = new Uint8Array(data.length + shift).subarray(shift);
      moved.set(data);
      expect(unitRowsOf(unpackUnits([moved]))).toEqual(rows);
    }
  });

  it('write the bytes that the format names', () => {
    const { data } = packUnits(unitsFrom([oneUnit()]), BLOCK_MINUTES)[0]!;
    const view = new DataView(data.buffer);
    expect(data.length).toBe(32 + 16 + 21);
    expect(new TextDecoder().decode(data.subarray(0, 4))).toBe('WWPK');
    expect([view.getUint8(4), view.getUint8(5), view.getUint16(6, true)]).toEqual([1, 0, 15]);
    const header = [8, 12, 16, 20, 24, 28].map((offset) => view.getInt32(offset, true));
    expect(header).toEqual([1, 1, 2, FIRST_BLOCK + 30, 1, 0]);
    expect([32, 36, 40, 44].map((offset) => view.getInt32(offset, true))).toEqual([160, 3, 4, 0]);
    expect([48, 52, 56].map((offset) => view.getInt32(offset, true))).toEqual([7, 45, 40]);
    expect([60, 62, 64, 66].map((offset) => view.getUint16(offset, true))).toEqual([0, 0, 2, 2]);
    expect(view.getUint8(68)).toBe(27);
  });

  it('make no pack of no units, and no units of no packs', () => {
    expect(packUnits(emptyUnits(0), BLOCK_MINUTES)).toEqual([]);
    expect(unitRowsOf(unpackUnits([]))).toEqual([]);
  });

  it('refuse rows of a pair that do not stand together', () => {
    const rows = [oneUnit(), oneUnit({ antennaB: 3 }), oneUnit()];
    expect(() => packUnits(unitsFrom(rows), BLOCK_MINUTES)).toThrow(
      'The rows of antennas 1 and 2 do not stand together.',
    );
  });

  it('refuse blocks of another length than stated', () => {
    const rows = [oneUnit(), oneUnit({ blockMinute: FIRST_BLOCK + 40 })];
    expect(() => packUnits(unitsFrom(rows), BLOCK_MINUTES)).toThrow(RangeError);
    expect(() => packUnits(unitsFrom(rows), 0)).toThrow('blockMinutes is 0');
  });

  it('refuse more blocks than a pack can number', () => {
    const rows = [oneUnit(), oneUnit({ blockMinute: FIRST_BLOCK + 30 + 65_536 * 15 })];
    expect(() => packUnits(unitsFrom(rows), BLOCK_MINUTES)).toThrow(RangeError);
  });

  it('refuse, naming the pack, every cut of a pack and foreign bytes', () => {
    const { data } = packUnits(unitsFrom([oneUnit(), oneUnit({ call: 9 })]), BLOCK_MINUTES)[0]!;
    for (let length = 0; length < data.length; length++) {
      expect(() => unpackUnits([data, data.slice(0, length)])).toThrow(/^Pack 1 /);
    }
    const longer = new Uint8Array(data.length + 1);
    longer.set(data);
    expect(() => unpackUnits([longer])).toThrow('Pack 0 has 91 bytes where its header says 90.');
    expect(() => unpackUnits([new Uint8Array(100)])).toThrow(
      'Pack 0 is not a pack of units or heard-only rows.',
    );
    const newer = data.slice();
    newer[4] = 2;
    expect(() => unpackUnits([newer])).toThrow('Pack 0 has version 2; 1 can be read.');
  });
});

describe('packHeardOnly and unpackHeardOnly', () => {
  it('give every heard-only row back exactly, pair by pair', () => {
    fc.assert(
      fc.property(ofPairs(heardOnlyArbitrary), (rows) => {
        const packs = packHeardOnly(heardOnlyFrom(rows), BLOCK_MINUTES);
        const back = unpackHeardOnly(packs.map((pack) => pack.data));
        expect(heardOnlyRowsOf(back)).toEqual(heardOnlyRowsOf(heardOnlyFrom(rows)));
        expect(packs.reduce((sum, pack) => sum + pack.count, 0)).toBe(rows.length);
      }),
    );
  });

  it('refuse a pack of units', () => {
    const { data } = packUnits(unitsFrom([oneUnit()]), BLOCK_MINUTES)[0]!;
    expect(() => unpackHeardOnly([data])).toThrow('Pack 0 does not hold heard-only rows.');
  });
});
