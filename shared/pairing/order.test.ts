import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { spotColumns, type SpotRow } from './from-rows.ts';
import { orderByKey, orderSpots, settleTies } from './order.ts';

const START_MS = Date.UTC(2026, 0, 5, 20);

/** Spots over ten years and all call ids, with many equal times, calls and bands. */
const spotArbitrary: fc.Arbitrary<SpotRow> = fc.record({
  timeMs: fc
    .oneof(fc.integer({ min: 0, max: 3 }), fc.integer({ min: 0, max: 315_360_000_000 }))
    .map((ms) => START_MS + ms),
  receiver: fc.integer({ min: 1, max: 3 }),
  call: fc.oneof(fc.integer({ min: 0, max: 3 }), fc.integer({ min: 0, max: 2_147_483_647 })),
  band: fc.constantFrom(160, 80, 40, 2200, -1),
  freq100Hz: fc.integer({ min: 18_200, max: 18_203 }),
  snrDb: fc.integer({ min: -2, max: 2 }),
});

describe('orderSpots', () => {
  it('orders by call, band and time as a comparison sort does, whether or not times come in order', () => {
    fc.assert(
      fc.property(fc.array(spotArbitrary, { maxLength: 80 }), fc.boolean(), (rows, sorted) => {
        if (sorted) rows.sort((p, q) => p.timeMs - q.timeMs);
        const wanted = rows
          .map((_, i) => i)
          .sort(
            (p, q) =>
              rows[p]!.call - rows[q]!.call ||
              rows[p]!.band - rows[q]!.band ||
              rows[p]!.timeMs - rows[q]!.timeMs ||
              p - q,
          );
        expect(Array.from(orderSpots(spotColumns(rows)))).toEqual(wanted);
      }),
      { numRuns: 500 },
    );
  });
});

describe('settleTies', () => {
  it('orders equal times by receiver, frequency, then the stronger', () => {
    const spot = { timeMs: START_MS, receiver: 1, call: 7, band: 160, freq100Hz: 18_200, snrDb: 10 };
    const rows = [
      { ...spot, receiver: 2 },
      { ...spot, freq100Hz: 18_201 },
      { ...spot, snrDb: 12 },
      spot,
      { ...spot, timeMs: START_MS - 0.25, receiver: 3 },
    ];
    const spots = spotColumns(rows);
    const order = Uint32Array.of(0, 1, 2, 3, 4);
    settleTies(order, 0, 5, spots);
    expect(Array.from(order)).toEqual([4, 2, 3, 1, 0]);
  });

  it('leaves the rows outside its stretch alone', () => {
    const spot = { timeMs: START_MS, receiver: 1, call: 7, band: 160, freq100Hz: 18_200, snrDb: 10 };
    const rows = [3, 2, 1, 0].map((receiver) => ({ ...spot, receiver }));
    const order = Uint32Array.of(0, 1, 2, 3);
    settleTies(order, 1, 3, spotColumns(rows));
    expect(Array.from(order)).toEqual([0, 2, 1, 3]);
  });
});

describe('orderByKey', () => {
  it('keeps rows of one key in the order they came', () => {
    expect(Array.from(orderByKey(Uint32Array.of(2, 0, 2, 1, 0), 4))).toEqual([1, 4, 3, 0, 2]);
  });
});
