import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { DwellColumns } from './columns.ts';
import { GUARDED, TAGGED, UNTAGGED, tagSpots } from './tag.ts';

type Dwell = [receiver: number, antenna: number, startSeconds: number, endSeconds: number];
type Spot = [receiver: number, seconds: number, uncertaintySeconds?: number];

function dwellColumns(dwells: Dwell[]): DwellColumns {
  return {
    receiver: Int32Array.from(dwells, (dwell) => dwell[0]),
    antenna: Int32Array.from(dwells, (dwell) => dwell[1]),
    startMs: Float64Array.from(dwells, (dwell) => dwell[2] * 1000),
    endMs: Float64Array.from(dwells, (dwell) => dwell[3] * 1000),
  };
}

function tagged(spots: Spot[], dwells: Dwell[], guardSeconds = 20) {
  const columns = {
    timeMs: Float64Array.from(spots, (spot) => spot[1] * 1000),
    receiver: Int32Array.from(spots, (spot) => spot[0]),
    uncertaintySeconds: Uint8Array.from(spots, (spot) => spot[2] ?? 0),
  };
  const { antenna, tag, dwell } = tagSpots(columns, dwellColumns(dwells), guardSeconds);
  return spots.map((_, i) => ({ antenna: antenna[i], tag: tag[i], dwell: dwell[i] }));
}

const [A, B] = [11, 12];

describe('tagSpots', () => {
  it('gives a spot the antenna of the dwell that holds it, start included and end not', () => {
    const dwells: Dwell[] = [[1, A, 100, 200]];
    const tags = tagged(
      [
        [1, 99.999],
        [1, 100],
        [1, 199.999],
        [1, 200],
      ],
      dwells,
      0,
    );
    expect(tags.map((row) => row.antenna)).toEqual([0, A, A, 0]);
    expect(tags.map((row) => row.tag)).toEqual([UNTAGGED, TAGGED, TAGGED, UNTAGGED]);
    expect(tags.map((row) => row.dwell)).toEqual([-1, 0, 0, -1]);
  });

  it('guards the seconds after a switch and keeps the antenna visible', () => {
    const dwells: Dwell[] = [
      [1, A, 100, 200],
      [1, B, 200, 300],
    ];
    const tags = tagged(
      [
        [1, 219.999],
        [1, 220],
      ],
      dwells,
    );
    expect(tags).toEqual([
      { antenna: B, tag: GUARDED, dwell: 1 },
      { antenna: B, tag: TAGGED, dwell: 1 },
    ]);
  });

  it('guards every dwell’s start, also when the dwell before was on the same antenna', () => {
    const dwells: Dwell[] = [
      [1, A, 100, 200],
      [1, A, 200, 300],
    ];
    expect(tagged([[1, 210]], dwells)).toEqual([{ antenna: A, tag: GUARDED, dwell: 1 }]);
  });

  it('guards a spot known to the minute when a switch falls within that minute', () => {
    const dwells: Dwell[] = [
      [1, A, 0, 630],
      [1, B, 630, 1260],
    ];
    const tags = tagged(
      [
        [1, 540, 60],
        [1, 600, 60],
        [1, 600],
        [1, 660, 60],
      ],
      dwells,
    );
    expect(tags.map((row) => row.tag)).toEqual([TAGGED, GUARDED, TAGGED, TAGGED]);
  });

  it('lets the switch at the very end of the known minute do no harm', () => {
    const dwells: Dwell[] = [
      [1, A, 0, 600],
      [1, B, 600, 1200],
    ];
    expect(tagged([[1, 540, 60]], dwells).map((row) => row.tag)).toEqual([TAGGED]);
  });

  it('guards a spot known to the minute when the dwell ends in it without a next one', () => {
    expect(tagged([[1, 540, 60]], [[1, A, 0, 570]]).map((row) => row.tag)).toEqual([GUARDED]);
  });

  it('leaves the dwells of another receiver alone', () => {
    const dwells: Dwell[] = [[1, A, 0, 1000]];
    expect(tagged([[2, 500]], dwells)).toEqual([{ antenna: 0, tag: UNTAGGED, dwell: -1 }]);
  });

  it('takes an open dwell to last', () => {
    expect(tagged([[1, 1e9, 60]], [[1, A, 0, Infinity]]).map((row) => row.tag)).toEqual([TAGGED]);
  });

  it('refuses dwells that overlap on one receiver and names them', () => {
    const dwells: Dwell[] = [
      [1, B, 150, 250],
      [2, A, 100, 200],
      [1, A, 100, 200],
    ];
    expect(() => tagged([], dwells)).toThrow('Dwells 2 and 0 of receiver 1 overlap.');
  });

  it('refuses a dwell that ends where it starts', () => {
    expect(() => tagged([], [[1, A, 100, 100]])).toThrow(
      'Dwell 0 runs from 100000 to 100000: it must end after it starts.',
    );
  });

  it('refuses antenna id 0, which means none', () => {
    expect(() => tagged([], [[1, 0, 100, 200]])).toThrow('Dwell 0 has antenna id 0; ids start at 1.');
  });

  it('refuses a negative guard', () => {
    expect(() => tagged([], [], -1)).toThrow('guardSeconds is -1; it must be 0 or more.');
  });

  it('refuses columns of unequal length', () => {
    const spots = {
      timeMs: new Float64Array(2),
      receiver: new Int32Array(1),
      uncertaintySeconds: new Uint8Array(2),
    };
    expect(() => tagSpots(spots, dwellColumns([]), 20)).toThrow(
      'spots.receiver has 1 rows, the other columns have 2: all must have the same.',
    );
  });

  it('agrees with a search through all dwells, in whatever order the spots come', () => {
    const lengths = fc.array(
      fc.record({
        receiver: fc.integer({ min: 1, max: 3 }),
        antenna: fc.integer({ min: 1, max: 3 }),
        gap: fc.constantFrom(0, 0, 5, 40),
        length: fc.integer({ min: 1, max: 120 }),
      }),
      { maxLength: 25 },
    );
    const spots = fc.array(
      fc.tuple(fc.integer({ min: 1, max: 4 }), fc.integer({ min: -5, max: 800 }), fc.constantFrom(0, 60)),
      { maxLength: 60 },
    );
    fc.assert(
      fc.property(lengths, spots, fc.constantFrom(0, 20), fc.boolean(), (steps, rows, guard, sort) => {
        const clock = new Map<number, number>();
        const dwells = steps.map(({ receiver, antenna, gap, length }): Dwell => {
          const start = (clock.get(receiver) ?? 0) + gap;
          clock.set(receiver, start + length);
          return [receiver, antenna, start, start + length];
        });
        dwells.reverse();
        if (sort) rows.sort((p, q) => p[1] - q[1]);
        const wanted = rows.map(([receiver, time, uncertainty]) => {
          const dwell = dwells.findIndex((d) => d[0] === receiver && d[2] <= time && time < d[3]);
          if (dwell < 0) return { antenna: 0, tag: UNTAGGED, dwell };
          const [, antenna, start] = dwells[dwell]!;
          // A switch: any start or end of a dwell of this receiver.
          const switches = dwells.filter((d) => d[0] === receiver).flatMap((d) => [d[2], d[3]]);
          const unsure = switches.some((at) => at > time && at < time + uncertainty);
          return { antenna, tag: time < start + guard || unsure ? GUARDED : TAGGED, dwell };
        });
        expect(tagged(rows, dwells, guard)).toEqual(wanted);
      }),
      { numRuns: 300 },
    );
  });
});
