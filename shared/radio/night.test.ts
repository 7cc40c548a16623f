import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { nightDate, nightEndMs, nightIndexOf, nightIndexOfDate, nightStartMs } from './night.ts';

const longitudes = fc.double({ min: -180, max: 180, noNaN: true });
const instants = fc.integer({ min: Date.UTC(1990, 0, 1), max: Date.UTC(2060, 0, 1) });

describe('nights', () => {
  // Worked by hand: solar noon at 9 W is 12:36 UTC, at 139.5 E 02:42 UTC, at 122.25 W 20:09 UTC.
  it.each([
    ['2026-01-05T12:35:59.999Z', -9, '2026-01-04'],
    ['2026-01-05T12:36:00.000Z', -9, '2026-01-05'],
    ['2026-01-05T23:59:59.000Z', -9, '2026-01-05'],
    ['2026-01-06T03:00:00.000Z', -9, '2026-01-05'],
    ['2026-01-06T02:41:59.999Z', 139.5, '2026-01-05'],
    ['2026-01-06T02:42:00.000Z', 139.5, '2026-01-06'],
    ['2026-01-06T20:08:59.999Z', -122.25, '2026-01-05'],
    ['2026-01-06T20:09:00.000Z', -122.25, '2026-01-06'],
    ['1969-12-31T23:00:00.000Z', 0, '1969-12-31'],
  ])('puts %s at longitude %d into the night of %s', (time, longitude, date) => {
    expect(nightDate(nightIndexOf(Date.parse(time), longitude))).toBe(date);
  });

  it('holds every instant from its start up to, but not including, its end', () => {
    fc.assert(
      fc.property(instants, longitudes, (timeMs, longitude) => {
        const night = nightIndexOf(timeMs, longitude);
        expect(nightStartMs(night, longitude)).toBeLessThanOrEqual(timeMs);
        expect(nightEndMs(night, longitude)).toBeGreaterThan(timeMs);
        expect(nightIndexOf(nightStartMs(night, longitude), longitude)).toBe(night);
        expect(nightIndexOf(nightEndMs(night, longitude) - 1, longitude)).toBe(night);
        expect(nightIndexOf(nightEndMs(night, longitude), longitude)).toBe(night + 1);
        expect(nightEndMs(night, longitude) - nightStartMs(night, longitude)).toBe(86_400_000);
      }),
    );
  });

  it('refuses an instant or a longitude that is no number', () => {
    expect(() => nightIndexOf(Number.NaN, -9)).toThrow(
      new RangeError('timeMs and longitudeDeg must be finite numbers, were NaN and -9'),
    );
    expect(() => nightIndexOf(0, Infinity)).toThrow(
      new RangeError('timeMs and longitudeDeg must be finite numbers, were 0 and Infinity'),
    );
  });

  it('reads back the date it writes', () => {
    fc.assert(
      fc.property(fc.integer({ min: -20_000, max: 60_000 }), (index) => {
        expect(nightIndexOfDate(nightDate(index))).toBe(index);
      }),
    );
  });

  it.each(['2026-02-30', '2026-1-5', '05.01.2026', '', '2026-13-01', '2026-01-05T00:00Z'])(
    'refuses the date "%s"',
    (date) => {
      expect(() => nightIndexOfDate(date)).toThrow(
        new RangeError(`date must be a calendar date written YYYY-MM-DD, was "${date}"`),
      );
    },
  );
});
