import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Dwell } from '../../../shared/contracts/dwell.ts';
import { guardWidth, itemAt, laneKey, layOutLane, narrowPx, timed } from './lane.ts';
import type { LaneBundle, LaneDwell, LaneItem } from './lane.ts';

const at = (text: string) => Date.parse(`2026-11-30T${text}Z`);
const iso = (timeMs: number) => new Date(timeMs).toISOString();
let nextId = 1;
const dwell = (antennaId: number, startMs: number, endMs: number | null): Dwell => ({
  ...{ id: nextId++, receiverId: 1, antennaId, source: 'hand', note: '' },
  startsAt: iso(startMs),
  endsAt: endMs === null ? null : iso(endMs),
});
/** 18:00Z to 20:00Z on 720 px: 6 px a minute. */
const range = { fromMs: at('18:00:00'), toMs: at('20:00:00') };
const lay = (dwells: Dwell[], now = '20:30:00', guardSeconds = 20) =>
  layOutLane(dwells.map(timed), range, 720, at(now), guardSeconds);
const kinds = (items: LaneItem[]) => items.map(({ kind }) => kind);

describe('a row of the time line', () => {
  it('shows dwells and the gaps before, between and after them', () => {
    const items = lay([dwell(1, at('18:10:00'), at('18:40:00')), dwell(2, at('18:50:00'), at('19:30:00'))]);
    expect(kinds(items)).toEqual(['gap', 'dwell', 'gap', 'dwell', 'gap']);
    expect(items.map(({ leftPx, rightPx }) => [leftPx, rightPx])).toEqual([
      [0, 60],
      [60, 240],
      [240, 300],
      [300, 540],
      [540, 720],
    ]);
  });

  it('has no gap in the future, and an open one up to now', () => {
    const items = lay([dwell(1, at('17:00:00'), at('18:30:00'))], '19:00:00');
    expect(items.map((item) => [item.kind, item.leftPx, item.rightPx])).toEqual([
      ['dwell', 0, 180],
      ['gap', 180, 360],
    ]);
    expect(items[1]).toMatchObject({ isOpen: true });
  });

  it('draws a dwell without an end up to now, with no gap behind it', () => {
    const items = lay([dwell(1, at('18:30:00'), null)], '19:00:00');
    expect(items.map((item) => [item.kind, item.leftPx, item.rightPx])).toEqual([
      ['gap', 0, 180],
      ['dwell', 180, 360],
    ]);
  });

  it('calls a gap open only when it reaches the present', () => {
    const earlier = lay([], '23:00:00');
    expect(earlier).toMatchObject([{ kind: 'gap', isOpen: false, leftPx: 0, rightPx: 720 }]);
  });

  it('bundles dwells that are too narrow, with the share of each antenna', () => {
    // 30 s are 3 px each: eight of them, two on antenna 1 for each on antenna 2 and one gap.
    const start = at('18:30:00');
    const half = 30_000;
    const dwells = [1, 1, 2, 1].map((antenna, i) => dwell(antenna, start + i * half, start + (i + 1) * half));
    const items = lay([
      dwell(3, at('18:00:00'), start),
      ...dwells,
      dwell(3, start + 5 * half, at('20:00:00')),
    ]);
    expect(kinds(items)).toEqual(['dwell', 'bundle', 'dwell']);
    expect(items[1]).toMatchObject({ dwellCount: 4, gapCount: 1, leftPx: 180, rightPx: 195 });
    const { shares } = items[1] as LaneBundle;
    expect(shares.map(({ antennaId }) => antennaId)).toEqual([1, 2]);
    expect(shares[0]!.share).toBeCloseTo(0.6, 9);
    expect(shares[1]!.share).toBeCloseTo(0.2, 9);
  });

  it('leaves one narrow dwell among wide ones by itself', () => {
    const items = lay([
      dwell(1, at('18:00:00'), at('18:30:00')),
      dwell(2, at('18:30:00'), at('18:30:30')),
      dwell(1, at('18:30:30'), at('20:00:00')),
    ]);
    expect(kinds(items)).toEqual(['dwell', 'dwell', 'dwell']);
  });

  it('loses no dwell and keeps the order, whatever the log and the width', () => {
    const log = fc.array(fc.tuple(fc.integer({ min: 1, max: 900 }), fc.integer({ min: 0, max: 300 })), {
      maxLength: 300,
    });
    fc.assert(
      fc.property(log, fc.integer({ min: 120, max: 2000 }), (parts, widthPx) => {
        let timeMs = range.fromMs - 600_000;
        const dwells = parts.map(([seconds, pause], i) => {
          timeMs += pause * 1000;
          const startMs = timeMs;
          timeMs += seconds * 1000;
          return dwell((i % 5) + 1, startMs, timeMs);
        });
        const items = layOutLane(dwells.map(timed), range, widthPx, at('19:10:00'), 20);
        const shown = items.reduce(
          (sum, item) => sum + (item.kind === 'bundle' ? item.dwellCount : Number(item.kind === 'dwell')),
          0,
        );
        const touching = dwells.filter(
          (each) => Date.parse(each.endsAt!) > range.fromMs && Date.parse(each.startsAt) < range.toMs,
        );
        expect(shown).toBe(touching.length);
        for (let i = 1; i < items.length; i++) {
          expect(items[i]!.leftPx).toBeGreaterThanOrEqual(items[i - 1]!.rightPx - 1e-6);
        }
      }),
    );
  });

  it('cuts bundles at the same times while the line is moved', () => {
    const dwells = Array.from({ length: 600 }, (_, i) =>
      dwell((i % 3) + 1, range.fromMs - 3_600_000 + i * 30_000, range.fromMs - 3_600_000 + (i + 1) * 30_000),
    ).map(timed);
    const cutsAfter = (movedMs: number) => {
      const moved = { fromMs: range.fromMs + movedMs, toMs: range.toMs + movedMs };
      const items = layOutLane(dwells, moved, 720, moved.toMs, 20);
      // The outermost ones are cut by the edge of the view.
      return items.map(({ fromMs }) => fromMs).filter((ms) => ms > range.fromMs + 600_000 && ms < range.toMs);
    };
    expect(cutsAfter(0).length).toBeGreaterThan(15);
    expect(cutsAfter(47_000)).toEqual(cutsAfter(0));
  });

  it('draws 2,000 dwells of a week as a few hundred items', () => {
    const week = { fromMs: range.fromMs, toMs: range.fromMs + 7 * 86_400_000 };
    const dwells = Array.from({ length: 2016 }, (_, i) =>
      dwell((i % 8) + 1, week.fromMs + i * 300_000, week.fromMs + (i + 1) * 300_000),
    );
    const items = layOutLane(dwells.map(timed), week, 1000, week.toMs, 20);
    expect(items.length).toBeLessThan(1000 / narrowPx);
    expect(items.every(({ kind }) => kind === 'bundle')).toBe(true);
  });
});

describe('guards', () => {
  it('are as wide as they last, never wider than the dwell', () => {
    const [first, second] = lay(
      [dwell(1, at('18:00:00'), at('19:00:00')), dwell(2, at('19:00:00'), at('19:01:30'))],
      '20:30:00',
      120,
    ) as LaneDwell[];
    expect(first!.guardPx).toBe(12);
    expect(second!.guardPx).toBeCloseTo(9, 6);
  });

  it('show at least three pixels where the bar has room', () => {
    const [wide] = lay([dwell(1, at('18:00:00'), at('19:00:00'))]) as LaneDwell[];
    // 20 s are 2 px here.
    expect(wide!.guardPx).toBe(3);
  });

  it('show what is left of them when the dwell begins before the view, and nothing once they are over', () => {
    const early = (startsAt: string) =>
      guardWidth({ dwell: { startsAt }, fromMs: range.fromMs, toMs: range.toMs }, range, 720, 60);
    expect(early('2026-11-30T17:59:30Z')).toBe(3);
    expect(early('2026-11-30T17:50:00Z')).toBe(0);
  });
});

describe('pointing at the time line', () => {
  const items = lay([
    dwell(1, at('18:00:00'), at('18:30:00')),
    dwell(2, at('18:30:00'), at('18:30:30')),
    dwell(3, at('18:30:30'), at('20:00:00')),
  ]);
  const antennaAt = (placePx: number, reachPx: number) => {
    const item = itemAt(items, placePx, reachPx);
    return item?.kind === 'dwell' ? item.dwell.antennaId : null;
  };

  it('meets the dwell under the pointer', () => {
    expect(antennaAt(20, 4)).toBe(1);
    expect(antennaAt(400, 4)).toBe(3);
  });

  it('lets a finger beside a narrow dwell meet it, and not from further away', () => {
    expect(antennaAt(172, 16)).toBe(2);
    expect(antennaAt(196, 16)).toBe(2);
    expect(antennaAt(150, 16)).toBe(1);
    expect(antennaAt(172, 4)).toBe(1);
  });

  it('meets nothing in the future', () => {
    const past = lay([dwell(1, at('18:00:00'), at('18:30:00'))], '18:30:00');
    expect(itemAt(past, 600, 16)).toBeNull();
  });

  it('names a dwell by its id and a gap by its receiver and start', () => {
    expect(laneKey(1, items[0]!)).toBe(`d${(items[0] as LaneDwell).dwell.id}`);
    const gap = lay([])[0]!;
    expect(laneKey(7, gap)).toBe(`g7-${range.fromMs}`);
  });
});
