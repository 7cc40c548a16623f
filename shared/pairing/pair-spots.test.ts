import { describe, expect, it } from 'vitest';
import { ALTERNATING, HEARD_ON_A, HEARD_ON_B, SIMULTANEOUS } from './columns.ts';
import {
  dwellColumns,
  heardOnlyRowsOf,
  spotColumns,
  unitRowsOf,
  type DwellRow,
  type SpotRow,
} from './from-rows.ts';
import { pairSpots } from './pair-spots.ts';
import { STANDING_RULES, type PairingRules } from './rules.ts';

// Small cases worked by hand from the written rules of the method. Times are given as seconds after
// 2026-01-05T20:00Z, which starts a block of every length; the first switch is well before.
const ORIGIN_MS = Date.UTC(2026, 0, 5, 20);
const BLOCK_0 = ORIGIN_MS / 60_000;
const at = (seconds: number) => ORIGIN_MS + seconds * 1000;
const [A, B, C] = [11, 12, 13];

function dwell(receiver: number, antenna: number, startSeconds = -600, endSeconds = 7200): DwellRow {
  return { receiver, antenna, startMs: at(startSeconds), endMs: at(endSeconds) };
}

function spot(receiver: number, seconds: number, snrDb: number, more: Partial<SpotRow> = {}): SpotRow {
  return { timeMs: at(seconds), receiver, call: 7, band: 160, freq100Hz: 18_205, snrDb, ...more };
}

function pair(spots: SpotRow[], dwells: DwellRow[], rules: Partial<PairingRules> = {}, window = [0, 7200]) {
  const result = pairSpots(
    spotColumns(spots),
    dwellColumns(dwells),
    { ...STANDING_RULES, ...rules },
    { startMs: at(window[0]!), endMs: at(window[1]!) },
  );
  return { ...result, units: unitRowsOf(result.units), heardOnly: heardOnlyRowsOf(result.heardOnly) };
}

const TWO_RECEIVERS = [dwell(1, A), dwell(2, B)];

describe('simultaneous units', () => {
  it('gives the difference A minus B of two receivers’ spots at the same moment', () => {
    const { units, matches } = pair(
      [spot(1, 100, 24, { speedWpm: 25 }), spot(2, 102, 19, { speedWpm: 28 })],
      TWO_RECEIVERS,
    );
    expect(units).toEqual([
      {
        antennaA: A,
        antennaB: B,
        call: 7,
        band: 160,
        blockMinute: BLOCK_0,
        receiverA: 1,
        receiverB: 2,
        kind: SIMULTANEOUS,
        differenceDb: 5,
        countA: 1,
        countB: 1,
        sumSnrA: 24,
        sumSnrB: 19,
        speedWpm: 27,
      },
    ]);
    expect(matches).toBe(1);
  });

  it('puts the antenna with the lower id first, whichever receiver it is on', () => {
    const { units } = pair([spot(1, 100, 24), spot(2, 102, 19)], [dwell(1, B), dwell(2, A)]);
    expect(units.map((u) => [u.antennaA, u.receiverA, u.receiverB, u.differenceDb])).toEqual([[A, 2, 1, -5]]);
  });

  it('averages the matches of a block into one unit', () => {
    // 24-19 = 5, 20-18 = 2, 21-24 = -3: mean 4/3.
    const { units } = pair(
      [
        spot(1, 100, 24),
        spot(2, 102, 19),
        spot(1, 200, 20),
        spot(2, 190, 18),
        spot(1, 300, 21),
        spot(2, 300, 24),
      ],
      TWO_RECEIVERS,
    );
    expect(units.map((u) => [u.countA, u.countB])).toEqual([[3, 3]]);
    expect(units[0]!.differenceDb).toBeCloseTo(4 / 3, 12);
  });

  it('matches only spots that are each other’s nearest', () => {
    // 110 is nearest to 105 but 105's nearest is 104: the spot at 110 stays without a match.
    const { units } = pair([spot(1, 104, 20), spot(1, 110, 30), spot(2, 105, 10)], TWO_RECEIVERS);
    expect(units.map((u) => [u.countA, u.differenceDb])).toEqual([[1, 10]]);
  });

  it('takes the earlier of two equally near spots', () => {
    const { units } = pair([spot(1, 100, 20), spot(2, 95, 10), spot(2, 105, 15)], TWO_RECEIVERS);
    expect(units.map((u) => [u.countA, u.differenceDb])).toEqual([[1, 10]]);
  });

  it('accepts a match at exactly the window and refuses one a millisecond further apart', () => {
    expect(pair([spot(1, 100, 20), spot(2, 130, 10)], TWO_RECEIVERS).matches).toBe(1);
    expect(pair([spot(1, 100, 20), spot(2, 130.001, 10)], TWO_RECEIVERS).matches).toBe(0);
  });

  it('accepts 0.3 kHz apart and refuses 0.4 kHz', () => {
    const other = (freq100Hz: number) => spot(2, 100, 10, { freq100Hz });
    expect(pair([spot(1, 100, 20), other(18_208)], TWO_RECEIVERS).matches).toBe(1);
    expect(pair([spot(1, 100, 20), other(18_202)], TWO_RECEIVERS).matches).toBe(1);
    expect(pair([spot(1, 100, 20), other(18_209)], TWO_RECEIVERS).matches).toBe(0);
  });

  it('looks at the frequency only after the nearest spot is chosen', () => {
    // The nearest in time is 5 kHz off: the one on frequency, further away, is not taken instead.
    const spots = [spot(1, 100, 20), spot(2, 101, 10, { freq100Hz: 18_255 }), spot(2, 103, 12)];
    expect(pair(spots, TWO_RECEIVERS).matches).toBe(0);
  });

  it('keeps stations and bands apart', () => {
    const other = { call: 8 };
    const band = { band: 80, freq100Hz: 35_205 };
    const spots = [spot(1, 100, 20), spot(2, 100, 10, other), spot(1, 200, 20, band), spot(2, 200, 10)];
    expect(pair(spots, TWO_RECEIVERS).units).toEqual([]);
  });

  it('makes a unit of two receivers on one antenna, the lower id on the first side', () => {
    const { units } = pair([spot(2, 100, 20), spot(1, 101, 10)], [dwell(1, A), dwell(2, A)]);
    expect(units.map((u) => [u.antennaA, u.antennaB, u.receiverA, u.receiverB, u.differenceDb])).toEqual([
      [A, A, 1, 2, -10],
    ]);
  });

  it('puts a match into the block of its midpoint', () => {
    // 890 and 908: midpoint 899 lies in the first block; 894 and 906: midpoint 900 starts the second.
    const first = pair([spot(1, 890, 20), spot(2, 908, 10)], TWO_RECEIVERS).units;
    const second = pair([spot(1, 894, 20), spot(2, 906, 10)], TWO_RECEIVERS).units;
    expect(first.map((u) => u.blockMinute)).toEqual([BLOCK_0]);
    expect(second.map((u) => u.blockMinute)).toEqual([BLOCK_0 + 15]);
  });

  it('keeps the receivers of a pair of antennas apart when they are swapped inside a block', () => {
    const dwells = [dwell(1, A, -600, 450), dwell(1, B, 450), dwell(2, B, -600, 450), dwell(2, A, 450)];
    const spots = [spot(1, 100, 20), spot(2, 100, 10), spot(1, 600, 13), spot(2, 600, 17)];
    const simultaneous = pair(spots, dwells).units.filter((u) => u.kind === SIMULTANEOUS);
    expect(simultaneous.map((u) => [u.receiverA, u.receiverB, u.differenceDb])).toEqual([
      [1, 2, 10],
      [2, 1, 4],
    ]);
  });

  it('makes all three pairs of three receivers on three antennas', () => {
    const spots = [spot(1, 100, 20), spot(2, 101, 10), spot(3, 102, 13)];
    const { units, matches } = pair(spots, [...TWO_RECEIVERS, dwell(3, C)]);
    expect(units.map((u) => [u.antennaA, u.antennaB, u.differenceDb])).toEqual([
      [A, B, 10],
      [A, C, 7],
      [B, C, -3],
    ]);
    expect(matches).toBe(3);
  });
});

describe('alternating units', () => {
  const dwells = [dwell(1, A, -600, 300), dwell(1, B, 300, 600), dwell(1, A, 600)];

  it('takes the mean on A minus the mean on B of one receiver in one block', () => {
    // On A 20, 22 and 27 (mean 23), on B 18 and 15 (mean 16.5): 6.5 dB.
    const spots = [spot(1, 100, 20), spot(1, 200, 22), spot(1, 400, 18), spot(1, 500, 15), spot(1, 700, 27)];
    const { units, matches } = pair(spots, dwells);
    expect(units).toEqual([
      {
        antennaA: A,
        antennaB: B,
        call: 7,
        band: 160,
        blockMinute: BLOCK_0,
        receiverA: 1,
        receiverB: 1,
        kind: ALTERNATING,
        differenceDb: 6.5,
        countA: 3,
        countB: 2,
        sumSnrA: 69,
        sumSnrB: 33,
        speedWpm: 0,
      },
    ]);
    expect(matches).toBe(0);
  });

  it('does not reach across blocks', () => {
    expect(pair([spot(1, 250, 20), spot(1, 350, 18)], dwells, { blockMinutes: 5 }).units).toEqual([]);
  });

  it('leaves guarded spots out', () => {
    expect(pair([spot(1, 100, 20), spot(1, 319, 18)], dwells).units).toEqual([]);
    expect(pair([spot(1, 100, 20), spot(1, 320, 18)], dwells).units).toHaveLength(1);
  });
});

describe('heard-only rows', () => {
  it('counts a station heard on A and not on B while both listened, with the silent side’s receiver', () => {
    const { heardOnly, units } = pair([spot(1, 100, 9), spot(1, 200, 12)], TWO_RECEIVERS);
    expect(units).toEqual([]);
    expect(heardOnly).toEqual([
      {
        antennaA: A,
        antennaB: B,
        call: 7,
        band: 160,
        blockMinute: BLOCK_0,
        side: HEARD_ON_A,
        receiverA: 1,
        receiverB: 2,
        count: 2,
        sumSnr: 21,
      },
    ]);
  });

  it('counts a station heard on B only', () => {
    const { heardOnly } = pair([spot(2, 100, 9)], TWO_RECEIVERS);
    expect(heardOnly.map((row) => [row.side, row.receiverA, row.receiverB])).toEqual([[HEARD_ON_B, 1, 2]]);
  });

  it('does not count a station heard on both at moments too far apart to match', () => {
    const { heardOnly, units } = pair([spot(1, 100, 9), spot(2, 500, 12)], TWO_RECEIVERS);
    expect(units).toEqual([]);
    expect(heardOnly).toEqual([]);
  });

  it('needs two minutes of listening on each side, guards left out', () => {
    // 20 s of guard and 120 s of listening; a second less is too little. The other side likewise.
    const ends = (seconds: number) => [dwell(1, A, 0, seconds), dwell(2, B, 0, seconds)];
    expect(pair([spot(1, 100, 9)], ends(140)).heardOnly).toHaveLength(1);
    expect(pair([spot(1, 100, 9)], ends(139)).heardOnly).toEqual([]);
  });

  it('needs listening times that differ by at most 20 % of the longer', () => {
    // A listens 900 s: B needs 720 s, and loses the 20 s of its guard.
    expect(pair([spot(1, 100, 9)], [dwell(1, A), dwell(2, B, 160)]).heardOnly).toHaveLength(1);
    expect(pair([spot(1, 100, 9)], [dwell(1, A), dwell(2, B, 161)]).heardOnly).toEqual([]);
  });

  it('adds up the receivers of an antenna, so that two receivers against one do not count', () => {
    const dwells = [dwell(1, A), dwell(2, B), dwell(3, A)];
    expect(pair([spot(1, 100, 9)], dwells).heardOnly).toEqual([]);
  });

  it('works for one receiver that alternates within the block', () => {
    const dwells = [dwell(1, A, 0, 450), dwell(1, B, 450, 900)];
    const { heardOnly } = pair([spot(1, 500, 9)], dwells);
    expect(heardOnly.map((row) => [row.side, row.receiverA, row.receiverB])).toEqual([[HEARD_ON_B, 1, 1]]);
  });

  it('does not take a guarded spot for a heard station', () => {
    expect(pair([spot(1, 10, 9)], [dwell(1, A, 0), dwell(2, B, 0)]).heardOnly).toEqual([]);
  });
});

describe('counts beside the units', () => {
  it('counts tagged, guarded and untagged spots by receiver, antenna and band', () => {
    const dwells = [dwell(1, A, 0, 450), dwell(1, B, 450, 600)];
    const spots = [
      spot(1, 10, 9),
      spot(1, 100, 9),
      spot(1, 460, 9),
      spot(1, 700, 9),
      spot(2, 100, 9),
      spot(1, 200, 9, { band: 80, freq100Hz: 35_100 }),
    ];
    expect(pair(spots, dwells).tallies).toEqual([
      { receiver: 1, antenna: 0, band: 160, tagged: 0, guarded: 0, untagged: 1 },
      { receiver: 1, antenna: A, band: 80, tagged: 1, guarded: 0, untagged: 0 },
      { receiver: 1, antenna: A, band: 160, tagged: 1, guarded: 1, untagged: 0 },
      { receiver: 1, antenna: B, band: 160, tagged: 0, guarded: 1, untagged: 0 },
      { receiver: 2, antenna: 0, band: 160, tagged: 0, guarded: 0, untagged: 1 },
    ]);
  });

  it('counts tagged spots by receiver, band and SNR', () => {
    const dwells = [dwell(1, A, -600, 450), dwell(1, B, 450), dwell(2, A, -600)];
    const spots = [
      spot(1, 100, 9),
      spot(1, 200, 12, { call: 7 }),
      spot(1, 700, 9),
      // In the guard after the switch, and without a dwell: neither counts.
      spot(1, 455, 3),
      spot(3, 100, 3),
      spot(2, 300, -4),
      spot(2, 350, 9, { band: 80, freq100Hz: 35_100 }),
    ];
    expect(pair(spots, dwells).levels).toEqual([
      { receiver: 1, band: 160, lowestDb: 9, spots: [2, 0, 0, 1] },
      { receiver: 2, band: 80, lowestDb: 9, spots: [1] },
      { receiver: 2, band: 160, lowestDb: -4, spots: [1] },
    ]);
  });

  it('takes spots equal in receiver, second, call and frequency for one, the earliest', () => {
    const dwells = [dwell(1, A, -600, 450), dwell(1, B, 450)];
    const spots = [
      spot(1, 100.9, 30),
      spot(1, 100.2, 10),
      spot(1, 101.1, 20),
      spot(1, 100.3, 18, { freq100Hz: 18_206 }),
      spot(1, 500, 0),
    ];
    const { units, doubles, tallies } = pair(spots, dwells);
    expect(doubles).toBe(1);
    expect(units.map((u) => [u.countA, u.sumSnrA])).toEqual([[3, 48]]);
    expect(tallies.map((row) => row.tagged)).toEqual([3, 1]);
  });

  it('reports listening seconds by receiver, antenna and block', () => {
    const { listening } = pair([], [dwell(1, A, 0, 450), dwell(1, B, 450, 1000)], {}, [0, 1800]);
    expect(Array.from(listening.antenna)).toEqual([A, B, B]);
    expect(Array.from(listening.blockMinute)).toEqual([BLOCK_0, BLOCK_0, BLOCK_0 + 15]);
    expect(Array.from(listening.seconds)).toEqual([430, 430, 100]);
  });

  it('returns only blocks that start in the window', () => {
    const spots = [100, 1000, 1900].flatMap((seconds) => [spot(1, seconds, 20), spot(2, seconds, 10)]);
    const { units, tallies } = pair(spots, TWO_RECEIVERS, {}, [1, 901]);
    expect(units.map((u) => u.blockMinute)).toEqual([BLOCK_0 + 15]);
    expect(tallies.map((row) => row.tagged)).toEqual([1, 1]);
  });
});

describe('input that cannot be paired', () => {
  it('gives empty columns for no spots and no dwells', () => {
    const result = pair([], []);
    expect([result.units, result.heardOnly, result.tallies, result.matches]).toEqual([[], [], [], 0]);
  });

  it('refuses a time that is no number', () => {
    expect(() => pair([spot(1, Number.NaN, 1)], [])).toThrow('Spot 0 has no usable time.');
  });

  it('refuses a window that runs backwards', () => {
    expect(() => pair([], [], {}, [10, 0])).toThrow(RangeError);
  });

  it('refuses a window in the wrong unit', () => {
    expect(() => pair([], [], {}, [0, 4e9])).toThrow('The window is longer than ten years.');
  });

  it('refuses rules that no station may set', () => {
    expect(() => pair([], [], { blockMinutes: 7 })).toThrow('blockMinutes is 7');
  });
});
