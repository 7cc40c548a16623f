import { describe, expect, it } from 'vitest';
import type { NightLines } from './digest.ts';
import { dwellChanges } from './dwell-changes.ts';
import type { FrozenDwell } from './evidence.ts';
import { nightChanges } from './night-changes.ts';
import { changedParts } from './number-changes.ts';

const at = (hour: number, minute = 0) => Date.UTC(2026, 10, 30, hour, minute);
function dwell(id: number, antennaId: number, from: number, to: number, receiverId = 1): FrozenDwell {
  return {
    ...{ id, receiverId, antennaId, startMs: from, endMs: to },
    receiver: receiverId === 1 ? 'EI7QSA' : 'EI7QSC',
    antenna: ['', 'North-east', 'West', 'Loop'][antennaId]!,
  };
}

describe('what changed in the switch log', () => {
  const log = [
    dwell(1, 1, at(18), at(19)),
    dwell(2, 2, at(19), at(20)),
    dwell(3, 3, at(20), at(21)),
    dwell(4, 1, at(18), at(21), 2),
  ];
  const between = (now: FrozenDwell[]) => dwellChanges(log, now, [1, 2], []);

  it('is nothing when the same dwells were written anew under other numbers', () => {
    expect(between(log.map((each) => ({ ...each, id: each.id + 500 })))).toEqual([]);
  });

  it('names a dwell that moved, with both times and who did it', () => {
    const now = log.map((each) => (each.id === 2 ? { ...each, startMs: at(19, 10) } : each));
    const [only, ...others] = dwellChanges(
      log,
      now,
      [1, 2],
      [{ dwellId: 2, who: 'Aoife', at: '2026-12-01T09:00:00.000Z' }],
    );
    expect(others).toEqual([]);
    expect(only).toMatchObject({ change: 'changed', by: 'Aoife', at: '2026-12-01T09:00:00.000Z' });
    expect(only!.sentence).toBe(
      'Dwell changed: EI7QSA on West, 2026-11-30 19:00:00Z to 2026-11-30 20:00:00Z is now from ' +
        '2026-11-30 19:10:00Z instead of 2026-11-30 19:00:00Z (Aoife, 2026-12-01 09:00Z).',
    );
  });

  it('tells added from removed, and takes an overlap on the same receiver for the same dwell', () => {
    const changes = between([
      log[0]!,
      dwell(9, 2, at(19), at(19, 50)),
      log[2]!,
      dwell(10, 2, at(22), at(23)),
    ]);
    expect(changes.map(({ change, before, after }) => [change, before?.antenna, after?.antenna])).toEqual([
      ['removed', 'North-east', undefined],
      ['changed', 'West', 'West'],
      ['added', undefined, 'West'],
    ]);
  });

  it('leaves out dwells of other antennas, but not one that came from or went to another', () => {
    const now = log.map((each) =>
      each.id === 3 ? { ...each, endMs: at(22) } : each.id === 1 ? dwell(1, 3, at(18), at(19)) : each,
    );
    expect(between(now).map((each) => [each.before!.antenna, each.after!.antenna])).toEqual([
      ['North-east', 'Loop'],
    ]);
  });
});

describe('what changed in the nights', () => {
  const night = (date: string, units: Record<string, string>, digest: string): NightLines => ({
    night: date,
    units: new Map(Object.entries(units)),
    heardOnly: new Map([['EA8QSH,160,a', 2]]),
    common: new Map(),
    digest,
  });

  it('is counted as units more, fewer and other, by night', () => {
    const then = [night('2026-11-01', { p: '1', q: '2', r: '3' }, 'x'), night('2026-11-02', { p: '1' }, 'y')];
    const now = [
      night('2026-11-01', { p: '1', q: '9', s: '4', t: '5' }, 'z'),
      night('2026-11-02', { p: '1' }, 'y'),
    ];
    const whole = { heardOnlyThen: 2, heardOnlyNow: 2 };
    expect(nightChanges(then, now)).toEqual([
      { night: '2026-11-01', unitsThen: 3, unitsNow: 4, added: 2, removed: 1, changed: 1, ...whole },
    ]);
    expect(nightChanges(then, now.slice(0, 1)).at(-1)).toEqual({
      ...{ night: '2026-11-02', unitsThen: 1, unitsNow: 0, added: 0, removed: 1, changed: 0 },
      ...{ heardOnlyThen: 2, heardOnlyNow: 0 },
    });
  });
});

describe('what changed in the numbers', () => {
  const then = { estimate: { db: 1.5, interval: [1, 2] }, question: { from: 'a' }, counts: { units: 3 } };

  it('is the parts that are not the same to the last bit, the estimate before the counts', () => {
    expect(changedParts(then, structuredClone(then))).toEqual([]);
    expect(
      changedParts(then, {
        ...then,
        counts: { units: 4 },
        estimate: { db: 1.5, interval: [1, 2 + 2 ** -51] },
      }),
    ).toEqual(['the estimate', 'the counts']);
  });

  it('is not what a later release says besides, nor the question itself', () => {
    expect(
      changedParts(then, { ...then, question: null, newView: 1, counts: { units: 3, clusters: 2 } }),
    ).toEqual([]);
  });

  it('is what is missing or shorter now', () => {
    expect(changedParts(then, { ...then, estimate: null })).toEqual(['the estimate']);
    expect(changedParts(then, { ...then, estimate: { db: 1.5, interval: [1] } })).toEqual(['the estimate']);
  });
});
