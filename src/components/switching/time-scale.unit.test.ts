import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  longestRangeMs,
  moveRange,
  pinchRange,
  placeOf,
  shortestRangeMs,
  spanOf,
  tidyRange,
  timeAt,
  timeTicks,
  zoomRange,
} from './time-scale.ts';

const at = (text: string) => Date.parse(`2026-11-30T${text}Z`);
const evening = { fromMs: at('18:00:00'), toMs: at('20:00:00') };

describe('the scale of the time line', () => {
  it('puts the middle of the range in the middle of the picture', () => {
    expect(placeOf(at('19:00:00'), evening, 800)).toBe(400);
    expect(placeOf(at('17:30:00'), evening, 800)).toBe(-200);
    expect(timeAt(600, evening, 800)).toBe(at('19:30:00'));
  });

  it('keeps the pointed-at instant where it is while zooming', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0, max: 800, noNaN: true }),
        fc.double({ min: 0.1, max: 8, noNaN: true }),
        (placePx, factor) => {
          const aboutMs = timeAt(placePx, evening, 800);
          expect(placeOf(aboutMs, zoomRange(evening, factor, aboutMs), 800)).toBeCloseTo(placePx, 3);
        },
      ),
    );
  });

  it('zooms neither below two minutes nor beyond 31 days', () => {
    expect(spanOf(zoomRange(evening, 1e-6, at('19:00:00')))).toBe(shortestRangeMs);
    expect(spanOf(zoomRange(evening, 1e6, at('19:00:00')))).toBe(longestRangeMs);
    expect(spanOf(tidyRange({ fromMs: 0, toMs: 400 * 86_400_000 }))).toBe(longestRangeMs);
  });

  it('moves by a stretch of time without changing its length', () => {
    expect(moveRange(evening, -1_800_000)).toEqual({ fromMs: at('17:30:00'), toMs: at('19:30:00') });
  });

  it('lets two fingers carry the instants under them', () => {
    // 18:30 and 19:30 lie at 200 and 600 px; spread to 0 and 800 px the hour between them fills the picture.
    const spread = pinchRange([at('18:30:00'), at('19:30:00')], [0, 800], 800);
    expect(spread).toEqual({ fromMs: at('18:30:00'), toMs: at('19:30:00') });
    // Both fingers 100 px to the right: the same scale, half an hour earlier in view.
    const carried = pinchRange([at('18:30:00'), at('19:30:00')], [300, 700], 800);
    expect(carried).toEqual({ fromMs: at('17:45:00'), toMs: at('19:45:00') });
  });

  it('makes no scale of two fingers on one spot or crossed', () => {
    expect(pinchRange([at('18:30:00'), at('19:30:00')], [300, 302], 800)).toBeNull();
    expect(pinchRange([at('18:30:00'), at('19:30:00')], [500, 300], 800)).toBeNull();
  });

  it('marks round times with room for their labels, and the day where it begins', () => {
    const clock = (timeMs: number) => new Date(timeMs).toISOString().slice(11, 16);
    expect(timeTicks(evening, 800).map(({ timeMs }) => clock(timeMs))).toEqual([
      ...['18:00', '18:15', '18:30', '18:45'],
      ...['19:00', '19:15', '19:30', '19:45', '20:00'],
    ]);
    const overnight = { fromMs: at('16:00:00'), toMs: at('16:00:00') + 16 * 3_600_000 };
    const ticks = timeTicks(overnight, 360);
    expect(ticks.map(({ timeMs }) => clock(timeMs))).toEqual(['18:00', '00:00', '06:00']);
    expect(ticks.map(({ startsDay }) => startsDay)).toEqual([false, true, false]);
  });

  it('never draws labels closer than the room that they need', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: shortestRangeMs, max: longestRangeMs }),
        fc.integer({ min: 240, max: 3000 }),
        (spanMs, widthPx) => {
          const range = { fromMs: at('00:00:00'), toMs: at('00:00:00') + spanMs };
          const places = timeTicks(range, widthPx).map(({ timeMs }) => placeOf(timeMs, range, widthPx));
          for (let i = 1; i < places.length; i++)
            expect(places[i]! - places[i - 1]!).toBeGreaterThanOrEqual(75.9);
        },
      ),
    );
  });
});
