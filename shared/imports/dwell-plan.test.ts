import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { planDwells, type LoggedDwell } from './dwell-plan.ts';
import type { DwellRow } from './dwell-rows.ts';

const row = (
  lineNo: number,
  receiver: number,
  antenna: number | null,
  startMs: number,
  endMs: number | null,
): DwellRow => ({
  lineNo,
  raw: `line ${lineNo}`,
  receiver: { id: receiver },
  antenna: antenna === null ? null : { id: antenna },
  startMs,
  endMs,
  note: '',
});
const name = (id: number) => `antenna ${id}`;
const hour = 3_600_000;

/** A log without overlaps: stretches cut at ascending times. */
const log = fc
  .array(
    fc.record({
      gap: fc.integer({ min: 0, max: 3 }),
      length: fc.integer({ min: 1, max: 4 }),
      antenna: fc.integer({ min: 1, max: 3 }),
    }),
    { maxLength: 6 },
  )
  .map((pieces) => {
    let at = 0;
    return pieces.map(({ gap, length, antenna }): LoggedDwell => {
      const startMs = (at + gap) * hour;
      at += gap + length;
      return { receiverId: 1, antennaId: antenna, startMs, endMs: at * hour };
    });
  });
const rows = fc
  .array(
    fc.record({
      receiver: fc.integer({ min: 1, max: 2 }),
      antenna: fc.option(fc.integer({ min: 1, max: 3 })),
      start: fc.integer({ min: 0, max: 20 }),
      length: fc.option(fc.integer({ min: 1, max: 4 })),
    }),
    { maxLength: 12 },
  )
  .map((all) =>
    all.map(({ receiver, antenna, start, length }, i) =>
      row(i + 2, receiver, antenna, start * hour, length === null ? null : (start + length) * hour),
    ),
  );

describe('planDwells', () => {
  it('never lets two dwells of a receiver overlap, and accounts for every line', () => {
    fc.assert(
      fc.property(rows, log, (lines, logged) => {
        const plan = planDwells(lines, logged, name);
        const all = [
          ...logged.map((dwell) => ({
            receiver: dwell.receiverId,
            startMs: dwell.startMs,
            endMs: dwell.endMs,
          })),
          ...plan.dwells.map((dwell) => ({
            receiver: 'id' in dwell.receiver ? dwell.receiver.id : 0,
            startMs: dwell.startMs,
            endMs: dwell.endMs,
          })),
        ];
        for (const [i, a] of all.entries()) {
          for (const b of all.slice(i + 1)) {
            const apart = (a.endMs ?? Infinity) <= b.startMs || (b.endMs ?? Infinity) <= a.startMs;
            expect(a.receiver !== b.receiver || apart).toBe(true);
          }
        }
        const told = [
          ...plan.dwells.map(({ lineNo }) => lineNo),
          ...plan.doubledLines,
          ...plan.refusals.map(({ lineNo }) => lineNo),
        ];
        const readable = lines.filter(({ antenna }) => antenna !== null).map(({ lineNo }) => lineNo);
        expect(told.sort((a, b) => a - b)).toEqual(readable);
      }),
    );
  });

  it('adds nothing when its own outcome is in the log already', () => {
    fc.assert(
      fc.property(rows, (lines) => {
        const first = planDwells(lines, [], name);
        const logged = first.dwells.map((dwell) => ({
          receiverId: 'id' in dwell.receiver ? dwell.receiver.id : 0,
          antennaId: 'id' in dwell.antenna ? dwell.antenna.id : 0,
          startMs: dwell.startMs,
          endMs: dwell.endMs,
        }));
        expect(planDwells(lines, logged, name).dwells).toEqual([]);
      }),
    );
  });

  it('ends a dwell where a refused line says that something else began', () => {
    const plan = planDwells([row(2, 1, 1, 0, null), row(3, 1, null, hour, null)], [], name);
    expect(plan.dwells.map(({ startMs, endMs }) => [startMs, endMs])).toEqual([[0, hour]]);
  });

  it('names a receiver or an antenna to make once, whatever the case of its letters', () => {
    const made = (lineNo: number, antenna: string, startMs: number): DwellRow => ({
      ...row(lineNo, 1, 1, startMs, startMs + 1),
      receiver: { make: 'EI7QSD' },
      antenna: { make: antenna },
    });
    const plan = planDwells([made(2, 'Loop', 0), made(3, 'LOOP', 5), made(4, 'Vertical', 9)], [], name);
    expect(plan.newReceivers).toEqual(['EI7QSD']);
    expect(plan.newAntennas).toEqual(['Loop', 'Vertical']);
  });
});
