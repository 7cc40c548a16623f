import * as astronomy from 'astronomy-engine';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { nightIndexOfDate, nightEndMs, nightStartMs } from './night.ts';
import type { Place } from './place.ts';
import { HORIZON_DEG, nightSun, pathSun, StationNights, Sun, sunAltitudeDeg } from './sun.ts';

const at = (latitude: number, longitude: number): Place => ({ latitude, longitude });
const io53 = at(53.5, -9);
const places = fc.record({
  latitude: fc.double({ min: -90, max: 90, noNaN: true }),
  longitude: fc.double({ min: -180, max: 180, noNaN: true }),
});
const instants = fc.integer({ min: Date.UTC(2015, 0, 1), max: Date.UTC(2045, 0, 1) });

/** Geometric altitude of the sun by astronomy-engine (VSOP87, its own earth rotation and nutation). */
function independentAltitude(timeMs: number, { latitude, longitude }: Place): number {
  const observer = new astronomy.Observer(latitude, longitude, 0);
  const { ra, dec } = astronomy.Equator(astronomy.Body.Sun, new Date(timeMs), observer, true, true);
  return astronomy.Horizon(new Date(timeMs), observer, ra, dec).altitude;
}

/** The instant at which astronomy-engine sees the sun's centre pass -0.833 degrees. */
function independentCrossing(place: Place, direction: 1 | -1, fromMs: number): number | null {
  const observer = new astronomy.Observer(place.latitude, place.longitude, 0);
  const sun = astronomy.Body.Sun;
  const found = astronomy.SearchAltitude(sun, observer, direction, new Date(fromMs), 1, HORIZON_DEG);
  return found?.date.getTime() ?? null;
}

describe('sun altitude', () => {
  it('agrees with astronomy-engine to 0.02 degrees anywhere in thirty years', () => {
    const sun = new Sun();
    fc.assert(
      fc.property(instants, places, (timeMs, place) => {
        expect(Math.abs(sun.altitudeDeg(timeMs, place) - independentAltitude(timeMs, place))).toBeLessThan(
          0.02,
        );
      }),
      { numRuns: 500 },
    );
  });

  it('gives the same value one by one, in a column and from a sun of its own', () => {
    const sun = new Sun();
    const timesMs = [0, 7, 1800, 3599, 3600].map((seconds) => Date.UTC(2026, 2, 20, 14) + seconds * 1000);
    expect([...sun.altitudesDeg(timesMs, io53)]).toEqual(timesMs.map((time) => sunAltitudeDeg(time, io53)));
  });
});

describe('sun altitude of nonsense', () => {
  it('is refused by name, since NaN would read as daylight', () => {
    expect(() => sunAltitudeDeg(Number.NaN, io53)).toThrow(
      new RangeError('timeMs must be a finite number of milliseconds'),
    );
    expect(() => sunAltitudeDeg(0, at(Number.NaN, 0))).toThrow(
      new RangeError('place must have finite coordinates, was latitude NaN, longitude 0'),
    );
  });
});

describe('path state', () => {
  it.each([
    [-20, -0.84, 'both dark', true],
    [-20, -6.1, 'both dark', false],
    [-0.833, -20, 'one dark', true],
    [30, -6, 'one dark', true],
    [30, 3, 'both light', true],
    [30, 3.1, 'both light', false],
    [0, 0, 'both light', true],
  ] as const)('with the sun at %d and %d degrees is %s, greyline %s', (from, to, state, greyline) => {
    expect(pathSun(from, to)).toEqual({ state, greyline });
  });

  it('sees a winter midnight path from Ireland to Ontario in the dark and to Japan in the light at one end', () => {
    const sun = new Sun();
    const midnight = Date.UTC(2026, 0, 6, 0);
    expect(sun.path(midnight, io53, at(45, -79.5))).toEqual({ state: 'both dark', greyline: false });
    expect(sun.path(midnight, io53, at(35.9, 139.6)).state).toBe('one dark');
  });
});

describe('sunset and sunrise of a night', () => {
  const year = Array.from({ length: 53 }, (_, week) => nightIndexOfDate('2026-01-01') + 7 * week);

  // astronomy-engine 2.1, SearchAltitude for the same -0.833 degrees.
  it.each([
    ['the equator', at(0, 0), 10],
    ['IO53', io53, 10],
    ['Tokyo Bay', at(35.6, 139.8), 10],
    ['New Zealand', at(-41, 174.9), 10],
    ['the Aleutians across the date line', at(52, -176), 10],
    ['Patagonia', at(-53, -70), 10],
    ['Iceland', at(65, -18), 30],
  ])('agree with astronomy-engine through a year at %s', (_name, place, toleranceSeconds) => {
    for (const night of year) {
      const startMs = nightStartMs(night, place.longitude);
      const { sunsetMs, sunriseMs, polar } = nightSun(night, place);
      const sunset = independentCrossing(place, -1, startMs);
      const sunrise = independentCrossing(place, 1, startMs + 43_200_000);
      expect(polar).toBeNull();
      expect(Math.abs(Number(sunsetMs) - Number(sunset)) / 1000).toBeLessThan(toleranceSeconds);
      expect(Math.abs(Number(sunriseMs) - Number(sunrise)) / 1000).toBeLessThan(toleranceSeconds);
    }
  });

  it('lie inside their night, sunset first, wherever the sun sets every day', () => {
    fc.assert(
      fc.property(
        fc.record({
          latitude: fc.double({ min: -60, max: 60, noNaN: true }),
          longitude: fc.double({ min: -180, max: 180, noNaN: true }),
        }),
        fc.integer({ min: 17_000, max: 27_000 }),
        (place, night) => {
          const { sunsetMs, sunriseMs } = nightSun(night, place);
          expect(Number(sunsetMs)).toBeGreaterThan(nightStartMs(night, place.longitude));
          expect(Number(sunriseMs)).toBeGreaterThan(Number(sunsetMs));
          expect(Number(sunriseMs)).toBeLessThan(nightEndMs(night, place.longitude));
        },
      ),
    );
  });

  // Svalbard at 78 N: midnight sun about 20 April to 23 August, polar night about 26 October to 16 February.
  it.each([
    ['2026-06-21', 'midnight sun'],
    ['2026-12-21', 'polar night'],
  ])('are null at 78 N in the night of %s: %s', (date, polar) => {
    const place = at(78.2, 15.6);
    expect(nightSun(nightIndexOfDate(date), place)).toEqual({ sunsetMs: null, sunriseMs: null, polar });
  });

  it('tell midnight sun from polar night as the altitude at midnight and noon does', () => {
    for (const latitude of [70, 78, 85, -70, -78]) {
      for (const night of year) {
        const place = at(latitude, 20);
        const { polar } = nightSun(night, place);
        const midnightAltitude = independentAltitude(nightStartMs(night, 20) + 43_200_000, place);
        const noonAltitude = independentAltitude(nightStartMs(night, 20), place);
        if (polar === 'midnight sun') expect(midnightAltitude).toBeGreaterThan(HORIZON_DEG - 0.5);
        if (polar === 'polar night') expect(noonAltitude).toBeLessThan(HORIZON_DEG + 0.5);
      }
    }
  });
});

describe('hours of a station', () => {
  it('count from the sunset and to the sunrise of the night that holds the instant', () => {
    const nights = new StationNights(io53);
    const night = nightIndexOfDate('2026-01-05');
    const { sunsetMs, sunriseMs } = nightSun(night, io53);
    expect(nights.night(night)).toEqual({ sunsetMs, sunriseMs, polar: null });
    const later = Number(sunsetMs) + 5_400_000;
    expect(nights.hoursFromSunset(later)).toBeCloseTo(1.5, 12);
    expect(nights.hoursFromSunrise(Number(sunriseMs) - 1_800_000)).toBeCloseTo(-0.5, 12);
    expect(nights.hoursFromSunset(nightStartMs(night, io53.longitude))).toBeLessThan(0);
  });

  it('are null where the sun does not set', () => {
    const nights = new StationNights(at(78.2, 15.6));
    expect(nights.hoursFromSunset(Date.UTC(2026, 5, 21, 23))).toBeNull();
    expect(nights.hoursFromSunrise(Date.UTC(2026, 5, 21, 23))).toBeNull();
  });
});
