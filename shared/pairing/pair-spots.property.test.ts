import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { ALTERNATING, HEARD_ON_A, HEARD_ON_B, SIMULTANEOUS } from './columns.ts';
import { spotsNeeded } from './blocks.ts';
import {
  dwellColumns,
  heardOnlyRowsOf,
  spotColumns,
  unitRowsOf,
  type DwellRow,
  type SpotRow,
} from './from-rows.ts';
import { pairSpots } from './pair-spots.ts';
import type { PairingRules } from './rules.ts';

// The rules of the method once more, in the plainest code: every spot looks at every other one.

type Tagged = Required<SpotRow> & { antenna: number };
type Row = Record<string, number>;

const floorTo = (value: number, step: number) => Math.floor(value / step) * step;
const distinct = (values: number[]) => [...new Set(values)].sort((p, q) => p - q);
const sum = (values: number[]) => values.reduce((total, value) => total + value, 0);
const mean = (values: number[]) => sum(values) / values.length;

function withoutDoubles(spots: Required<SpotRow>[]): Required<SpotRow>[] {
  const firstToLast = [...spots].sort(
    (p, q) =>
      p.timeMs - q.timeMs ||
      q.snrDb - p.snrDb ||
      q.speedWpm - p.speedWpm ||
      p.uncertaintySeconds - q.uncertaintySeconds,
  );
  const same = (p: SpotRow, q: SpotRow) =>
    p.receiver === q.receiver &&
    p.call === q.call &&
    p.freq100Hz === q.freq100Hz &&
    floorTo(p.timeMs, 1000) === floorTo(q.timeMs, 1000);
  return firstToLast.filter((spot, i) => firstToLast.findIndex((other) => same(other, spot)) === i);
}

function unguarded(spots: Required<SpotRow>[], dwells: DwellRow[], guardSeconds: number): Tagged[] {
  return spots.flatMap((spot) => {
    const dwell = dwells.find(
      (d) => d.receiver === spot.receiver && d.startMs <= spot.timeMs && spot.timeMs < d.endMs,
    );
    if (!dwell || spot.timeMs < dwell.startMs + guardSeconds * 1000) return [];
    const unsureUntilMs = spot.timeMs + spot.uncertaintySeconds * 1000;
    const switched = dwells.some(
      (d) =>
        d.receiver === spot.receiver &&
        [d.startMs, d.endMs].some((at) => at > spot.timeMs && at < unsureUntilMs),
    );
    return switched ? [] : [{ ...spot, antenna: dwell.antenna }];
  });
}

/** Nearest in time, ties the earlier; of spots at one time the lower in frequency, then the stronger. */
function nearest(spot: Tagged, others: Tagged[]): Tagged | undefined {
  return [...others].sort(
    (p, q) =>
      Math.abs(p.timeMs - spot.timeMs) - Math.abs(q.timeMs - spot.timeMs) ||
      p.timeMs - q.timeMs ||
      p.freq100Hz - q.freq100Hz ||
      q.snrDb - p.snrDb,
  )[0];
}

function speedOf(spots: Tagged[]): number {
  const known = spots.map((spot) => spot.speedWpm).filter((wpm) => wpm > 0);
  return known.length > 0 ? Math.round(mean(known)) : 0;
}

function unitOf(side: Tagged[], other: Tagged[], blockMinute: number, kind: number): Row {
  return {
    antennaA: side[0]!.antenna,
    antennaB: other[0]!.antenna,
    call: side[0]!.call,
    band: side[0]!.band,
    blockMinute,
    receiverA: side[0]!.receiver,
    receiverB: other[0]!.receiver,
    kind,
    differenceDb: mean(side.map((s) => s.snrDb)) - mean(other.map((s) => s.snrDb)),
    countA: side.length,
    countB: other.length,
    sumSnrA: sum(side.map((s) => s.snrDb)),
    sumSnrB: sum(other.map((s) => s.snrDb)),
    speedWpm: speedOf([...side, ...other]),
  };
}

function naive(
  input: Required<SpotRow>[],
  dwells: DwellRow[],
  rules: PairingRules,
  window: { startMs: number; endMs: number },
) {
  const spots = unguarded(withoutDoubles(input), dwells, rules.guardSeconds);
  const blockMs = rules.blockMinutes * 60_000;
  const inWindow = (startMs: number) => startMs >= window.startMs && startMs < window.endMs;
  const receivers = distinct(dwells.map((d) => d.receiver));
  const antennas = distinct(dwells.map((d) => d.antenna));
  const units: Row[] = [];
  const heardOnly: Row[] = [];

  const groups = distinct(spots.map((s) => s.call * 1000 + s.band));
  for (const group of groups) {
    const own = spots.filter((s) => s.call * 1000 + s.band === group);
    const blocks = distinct(
      own.flatMap((s) => [floorTo(s.timeMs, blockMs) - blockMs, floorTo(s.timeMs, blockMs)]),
    );
    for (const antennaA of antennas) {
      for (const antennaB of antennas.filter((id) => id >= antennaA)) {
        for (const receiverA of receivers) {
          const onA = own.filter((s) => s.antenna === antennaA && s.receiver === receiverA);
          for (const receiverB of receivers) {
            const onB = own.filter((s) => s.antenna === antennaB && s.receiver === receiverB);
            // On one antenna: each pair of receivers once, the lower id on A's side.
            if (antennaA === antennaB && receiverA >= receiverB) continue;
            if (receiverA === receiverB) {
              for (const block of blocks.filter(inWindow)) {
                const inBlock = (s: Tagged) => floorTo(s.timeMs, blockMs) === block;
                const [side, other] = [onA.filter(inBlock), onB.filter(inBlock)];
                if (side.length > 0 && other.length > 0) {
                  units.push(unitOf(side, other, block / 60_000, ALTERNATING));
                }
              }
              continue;
            }
            const matches = onA.flatMap((a) => {
              const b = nearest(a, onB);
              if (!b || nearest(b, onA) !== a) return [];
              const near = Math.abs(a.timeMs - b.timeMs) <= rules.windowSeconds * 1000;
              const tuned = Math.abs(a.freq100Hz - b.freq100Hz) <= Math.round(rules.freqToleranceKhz * 10);
              return near && tuned ? [{ a, b, block: floorTo((a.timeMs + b.timeMs) / 2, blockMs) }] : [];
            });
            for (const block of distinct(matches.map((m) => m.block)).filter(inWindow)) {
              const inBlock = matches.filter((m) => m.block === block);
              units.push(
                unitOf(
                  inBlock.map((m) => m.a),
                  inBlock.map((m) => m.b),
                  block / 60_000,
                  SIMULTANEOUS,
                ),
              );
            }
          }
        }
        for (const block of antennaA === antennaB ? [] : blocks.filter(inWindow)) {
          // Dwells start and end on whole seconds here: count the seconds one by one.
          const seconds = (antenna: number, receiver?: number) => {
            let listened = 0;
            for (let t = block; t < block + blockMs; t += 1000) {
              listened += dwells.filter(
                (d) =>
                  d.antenna === antenna &&
                  (receiver === undefined || d.receiver === receiver) &&
                  d.startMs + rules.guardSeconds * 1000 <= t &&
                  t < d.endMs,
              ).length;
            }
            return listened;
          };
          const heard = (antenna: number) =>
            own.filter((s) => s.antenna === antenna && floorTo(s.timeMs, blockMs) === block);
          const [heardA, heardB] = [heard(antennaA), heard(antennaB)];
          if (heardA.length > 0 === heardB.length > 0) continue;
          const [la, lb] = [seconds(antennaA), seconds(antennaB)];
          if (la < 120 || lb < 120 || Math.abs(la - lb) * 10 > 2 * Math.max(la, lb)) continue;
          const first = (score: (receiver: number) => number) =>
            receivers.find((r) => score(r) === Math.max(...receivers.map(score)))!;
          const receiverOf = (antenna: number, mine: Tagged[]) =>
            first(
              mine.length > 0
                ? (r) => mine.filter((s) => s.receiver === r).length
                : (r) => seconds(antenna, r),
            );
          const both = [...heardA, ...heardB];
          heardOnly.push({
            antennaA,
            antennaB,
            call: both[0]!.call,
            band: both[0]!.band,
            blockMinute: block / 60_000,
            side: heardA.length > 0 ? HEARD_ON_A : HEARD_ON_B,
            receiverA: receiverOf(antennaA, heardA),
            receiverB: receiverOf(antennaB, heardB),
            count: both.length,
            sumSnr: sum(both.map((s) => s.snrDb)),
          });
        }
      }
    }
  }
  return { units: sorted(units), heardOnly: sorted(heardOnly) };
}

/** Rows in one order, with differences rounded to where both ways of dividing agree. */
function sorted(rows: readonly Row[]): Row[] {
  const rounded = rows.map((row) =>
    'differenceDb' in row ? { ...row, differenceDb: Math.round(row.differenceDb! * 1e9) / 1e9 + 0 } : row,
  );
  const key = (row: Row) => Object.values(row).join();
  return rounded.sort((p, q) => (key(p) < key(q) ? -1 : 1));
}

function paired(
  spots: SpotRow[],
  dwells: DwellRow[],
  rules: PairingRules,
  window: { startMs: number; endMs: number },
) {
  const result = pairSpots(spotColumns(spots), dwellColumns(dwells), rules, window);
  return {
    ...result,
    unitRows: sorted(unitRowsOf(result.units)),
    heardRows: sorted(heardOnlyRowsOf(result.heardOnly)),
  };
}

const ORIGIN_MS = Date.UTC(2026, 0, 5, 20);
const SPAN_SECONDS = 1500;

const rulesArbitrary: fc.Arbitrary<PairingRules> = fc.record({
  blockMinutes: fc.constantFrom(5, 10, 15),
  windowSeconds: fc.constantFrom(5, 30, 90),
  freqToleranceKhz: fc.constantFrom(0, 0.3),
  guardSeconds: fc.constantFrom(0, 20),
});

/** Three receivers that step through three antennas with now and then a gap. */
const dwellsArbitrary: fc.Arbitrary<DwellRow[]> = fc
  .array(
    fc.record({
      receiver: fc.integer({ min: 1, max: 3 }),
      antenna: fc.constantFrom(4, 4, 5, 5, 6),
      gapSeconds: fc.constantFrom(0, 0, 0, 30),
      seconds: fc.constantFrom(60, 150, 300, 900),
    }),
    { minLength: 6, maxLength: 20 },
  )
  .map((steps) => {
    const clock = new Map<number, number>();
    return steps.map(({ receiver, antenna, gapSeconds, seconds }) => {
      const startMs = (clock.get(receiver) ?? ORIGIN_MS) + gapSeconds * 1000;
      clock.set(receiver, startMs + seconds * 1000);
      return { receiver, antenna, startMs, endMs: startMs + seconds * 1000 };
    });
  });

const spotArbitrary: fc.Arbitrary<Required<SpotRow>> = fc
  .record({
    deciseconds: fc.oneof(
      fc.integer({ min: 0, max: SPAN_SECONDS * 10 }),
      // Whole multiples of ten seconds, so that ties and equal times are common.
      fc.integer({ min: 0, max: SPAN_SECONDS / 10 }).map((tens) => tens * 100),
    ),
    receiver: fc.constantFrom(1, 1, 2, 2, 3, 3, 4),
    call: fc.constantFrom(7, 7, 7, 9),
    band: fc.constantFrom(160, 160, 80),
    offset: fc.constantFrom(0, 0, 0, 1, 3, 4),
    snrDb: fc.integer({ min: -3, max: 40 }),
    uncertaintySeconds: fc.constantFrom(0, 0, 0, 60),
    speedWpm: fc.constantFrom(0, 20, 31),
  })
  .map(({ deciseconds, offset, ...row }) => ({
    ...row,
    timeMs: ORIGIN_MS + deciseconds * 100,
    freq100Hz: row.band === 160 ? 18_205 + offset : 35_205 + offset,
  }));
const spotsArbitrary = fc.array(spotArbitrary, { minLength: 30, maxLength: 90 });

describe('pairSpots against the plainest reading of the rules', () => {
  it('finds the same units and heard-only rows as a search through everything', () => {
    let units = 0;
    let heardOnly = 0;
    fc.assert(
      fc.property(spotsArbitrary, dwellsArbitrary, rulesArbitrary, (spots, dwells, rules) => {
        const window = { startMs: ORIGIN_MS, endMs: ORIGIN_MS + SPAN_SECONDS * 1000 };
        const wanted = naive(spots, dwells, rules, window);
        const { unitRows, heardRows } = paired(spots, dwells, rules, window);
        expect(unitRows).toEqual(wanted.units);
        expect(heardRows).toEqual(wanted.heardOnly);
        units += wanted.units.length;
        heardOnly += wanted.heardOnly.length;
      }),
      { numRuns: 250 },
    );
    // The generator must make what is to be compared.
    expect(units).toBeGreaterThan(250);
    expect(heardOnly).toBeGreaterThan(250);
  }, 60_000);

  it('gives the same answer in whatever order the spots and dwells come', () => {
    fc.assert(
      fc.property(spotsArbitrary, dwellsArbitrary, rulesArbitrary, (spots, dwells, rules) => {
        const window = { startMs: ORIGIN_MS, endMs: ORIGIN_MS + SPAN_SECONDS * 1000 };
        const byTime = [...spots].sort((p, q) => p.timeMs - q.timeMs);
        const one = paired(spots, dwells, rules, window);
        const other = paired(byTime, [...dwells].reverse(), rules, window);
        expect(unitRowsOf(one.units)).toEqual(unitRowsOf(other.units));
        expect(one).toEqual(other);
      }),
      { numRuns: 200 },
    );
  });

  it('gives the same units window by window, each with only the spots it needs, as in one run', () => {
    const cutsArbitrary = fc.array(fc.integer({ min: 1, max: SPAN_SECONDS - 1 }), { maxLength: 3 });
    fc.assert(
      fc.property(
        spotsArbitrary,
        dwellsArbitrary,
        rulesArbitrary,
        cutsArbitrary,
        (spots, dwells, rules, cuts) => {
          const edges = [0, ...distinct(cuts), SPAN_SECONDS].map((seconds) => ORIGIN_MS + seconds * 1000);
          const whole = paired(spots, dwells, rules, { startMs: edges[0]!, endMs: edges.at(-1)! });
          const parts = edges.slice(1).map((endMs, i) => {
            const window = { startMs: edges[i]!, endMs };
            const need = spotsNeeded(window, rules);
            const own = spots.filter((s) => s.timeMs >= need.startMs && s.timeMs < need.endMs);
            return paired(own, dwells, rules, window);
          });
          expect(sorted(parts.flatMap((part) => part.unitRows))).toEqual(whole.unitRows);
          expect(sorted(parts.flatMap((part) => part.heardRows))).toEqual(whole.heardRows);
          expect(sum(parts.map((part) => part.matches))).toBe(whole.matches);
          expect(sum(parts.map((part) => part.doubles))).toBe(whole.doubles);
          const count = (tallies: typeof whole.tallies) =>
            tallies.map((t) => t.tagged + t.guarded + t.untagged);
          expect(sum(parts.flatMap((part) => count(part.tallies)))).toBe(sum(count(whole.tallies)));
          const levels = (of: typeof whole.levels) => sum(of.flatMap((row) => row.spots));
          expect(sum(parts.map((part) => levels(part.levels)))).toBe(levels(whole.levels));
        },
      ),
      { numRuns: 200 },
    );
  });
});
