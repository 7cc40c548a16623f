import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { dwellColumns, spotColumns, unitRowsOf, type SpotRow } from './from-rows.ts';
import { findLivePairs } from './live-pairs.ts';
import { pairSpots } from './pair-spots.ts';
import { STANDING_RULES } from './rules.ts';

const start = Date.parse('2026-01-05T18:00:00Z');
const dwells = dwellColumns([
  { receiver: 1, antenna: 7, startMs: start, endMs: Number.POSITIVE_INFINITY },
  { receiver: 2, antenna: 4, startMs: start, endMs: start + 600_000 },
  { receiver: 2, antenna: 9, startMs: start + 600_000, endMs: Number.POSITIVE_INFINITY },
  { receiver: 3, antenna: 7, startMs: start, endMs: Number.POSITIVE_INFINITY },
]);
const at = (seconds: number, receiver: number, change: Partial<SpotRow> = {}): SpotRow => ({
  timeMs: start + seconds * 1000,
  receiver,
  call: 5,
  band: 160,
  freq100Hz: 18245,
  snrDb: 20,
  ...change,
});
const find = (rows: SpotRow[]) => findLivePairs(spotColumns(rows), dwells, STANDING_RULES);

describe('live pairs', () => {
  it('put the antenna with the lower id on side A', () => {
    expect(find([at(60, 1), at(63, 2)])).toEqual([{ spotA: 1, spotB: 0, antennaA: 4, antennaB: 7 }]);
  });

  it('come newest first', () => {
    const rows = [at(60, 1), at(63, 2), at(300, 2, { call: 6 }), at(301, 1, { call: 6 })];
    expect(find(rows).map(({ spotB }) => spotB)).toEqual([3, 0]);
  });

  it('need two receivers, two antennas, one call, one band, the window and the tolerance', () => {
    const partner = at(60, 1);
    expect(find([partner, at(61, 1)])).toEqual([]);
    expect(find([partner, at(61, 3)])).toEqual([]);
    expect(find([partner, at(61, 2, { call: 6 })])).toEqual([]);
    expect(find([partner, at(61, 2, { band: 80 })])).toEqual([]);
    expect(find([partner, at(91, 2)])).toEqual([]);
    expect(find([partner, at(61, 2, { freq100Hz: 18249 })])).toEqual([]);
    expect(find([partner, at(90, 2, { freq100Hz: 18248 })])).toHaveLength(1);
  });

  it('leave out spots in a guard and spots without a dwell', () => {
    expect(find([at(605, 1), at(606, 2)])).toEqual([]);
    expect(find([at(625, 1), at(626, 2)])).toHaveLength(1);
    expect(find([at(-5, 1), at(-4, 2)])).toEqual([]);
  });

  it('are exactly the matches that simultaneous units are made of', () => {
    const row = fc.record({
      seconds: fc.integer({ min: 0, max: 1_700 }),
      receiver: fc.integer({ min: 1, max: 3 }),
      call: fc.integer({ min: 1, max: 3 }),
      freq100Hz: fc.integer({ min: 18240, max: 18246 }),
      snrDb: fc.integer({ min: -5, max: 40 }),
    });
    fc.assert(
      fc.property(fc.array(row, { maxLength: 60 }), (drawn) => {
        // Pairing counts doubles once; live spots are stored without doubles.
        const unique = new Map(drawn.map((one) => [`${one.seconds} ${one.receiver} ${one.call}`, one]));
        const rows = [...unique.values()].map(({ seconds, receiver, ...rest }) =>
          at(seconds, receiver, rest),
        );
        const matches = find(rows);
        const window = { startMs: start - 3_600_000, endMs: start + 3_600_000 };
        const units = unitRowsOf(pairSpots(spotColumns(rows), dwells, STANDING_RULES, window).units).filter(
          // Two receivers on one antenna compare receivers, which no live screen shows.
          ({ kind, antennaA, antennaB }) => kind === 0 && antennaA !== antennaB,
        );
        const sum = (values: number[]) => values.reduce((total, value) => total + value, 0);
        expect(matches.length).toBe(sum(units.map(({ countA }) => countA)));
        expect(sum(matches.map(({ spotA }) => rows[spotA]!.snrDb))).toBe(sum(units.map((u) => u.sumSnrA)));
        expect(sum(matches.map(({ spotB }) => rows[spotB]!.snrDb))).toBe(sum(units.map((u) => u.sumSnrB)));
      }),
    );
  });
});
