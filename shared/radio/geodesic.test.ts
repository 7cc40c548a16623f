import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  bearingSpreadDeg,
  normaliseAzimuth,
  pathTo,
  pathWithSpread,
  placeAt,
  sectorOf,
  sectorUnsure,
} from './geodesic.ts';
import type { Place } from './place.ts';

const at = (latitude: number, longitude: number): Place => ({ latitude, longitude });
const io53 = at(53.5, -9);
const places = fc.record({
  latitude: fc.double({ min: -85, max: 85, noNaN: true }),
  longitude: fc.double({ min: -180, max: 180, noNaN: true }),
});

describe('geodesics', () => {
  // GeographicLib manual, GeodSolve example (WGS-84): JFK to LHR.
  it('agrees with the GeographicLib manual from 40.6 N 73.8 W to 51.6 N 0.5 W', () => {
    const path = pathTo(at(40.6, -73.8), at(51.6, -0.5));
    expect(path.azimuthDeg).toBeCloseTo(51.198882845579824, 9);
    expect(path.distanceKm).toBeCloseTo(5551.759400318679, 7);
  });

  // GeographicLib's own test suite, case GeodSolve0 (JFK to Paris), printed to 5 decimals.
  it('agrees with the GeographicLib test GeodSolve0', () => {
    const path = pathTo(at(40.6, -73.8), at(49 + 1 / 60, 2.55));
    expect(path.azimuthDeg).toBeCloseTo(53.47022, 5);
    expect(path.distanceKm).toBeCloseTo(5853.226, 3);
  });

  // C. F. F. Karney, "Algorithms for geodesics", J. Geodesy 87 (2013), table 5: nearly antipodal places.
  it('agrees with the nearly antipodal example of Karney 2013', () => {
    const path = pathTo(at(-30, 0), at(29.9, 179.8));
    expect(path.azimuthDeg).toBeCloseTo(161.89052473633, 8);
    expect(path.distanceKm).toBeCloseTo(19989.83282761, 6);
  });

  // Karney 2013, table 2: direct problem from 40 N, azimuth 30, 10,000 km.
  it('agrees with the direct example of Karney 2013', () => {
    const end = placeAt(at(40, 0), 30, 10_000);
    expect(end.latitude).toBeCloseTo(41.79331020506, 9);
    expect(end.longitude).toBeCloseTo(137.84490004377, 9);
  });

  it('comes back to the place it set out for', () => {
    fc.assert(
      fc.property(places, places, (from, to) => {
        const { azimuthDeg, distanceKm } = pathTo(from, to);
        fc.pre(distanceKm > 1 && distanceKm < 19_900);
        expect(pathTo(placeAt(from, azimuthDeg, distanceKm), to).distanceKm).toBeLessThan(1e-6);
        expect(pathTo(to, from).distanceKm).toBeCloseTo(distanceKm, 6);
      }),
    );
  });

  it('names the coordinate that is off the globe', () => {
    expect(() => pathTo(at(91, 0), io53)).toThrow(
      new RangeError('from.latitude must be between -90 and 90 degrees, was 91'),
    );
    expect(() => pathTo(io53, at(0, Number.NaN))).toThrow(
      new RangeError('to.longitude must be a finite number of degrees, was NaN'),
    );
  });
});

describe('bearing spread', () => {
  /** The bearings of 240 points of the circle, measured one by one on the ellipsoid. */
  function measuredSpread(from: Place, to: Place, radiusKm: number): number {
    const middle = pathTo(from, to).azimuthDeg;
    const turns = Array.from({ length: 240 }, (_, index) => {
      const edge = placeAt(to, index * 1.5, radiusKm);
      return normaliseAzimuth(pathTo(from, edge).azimuthDeg - middle + 180) - 180;
    });
    return Math.max(...turns) - Math.min(...turns);
  }

  it('is the angle measured round the circle on the ellipsoid, to 2 %', () => {
    fc.assert(
      fc.property(
        places,
        fc.double({ min: 0, max: 360, noNaN: true }),
        fc.double({ min: 0, max: 19_700, noNaN: true }),
        fc.double({ min: 10, max: 2000, noNaN: true }),
        (from, azimuth, distanceKm, radiusKm) => {
          // Close to tangency with the station or its antipode the angle runs to 180 within a few km.
          fc.pre(distanceKm > radiusKm * 1.2 && 20_000 - distanceKm > radiusKm * 1.2 + 200);
          const to = placeAt(from, azimuth, distanceKm);
          const spread = bearingSpreadDeg(from, to, radiusKm);
          expect(Math.abs(spread / measuredSpread(from, to, radiusKm) - 1)).toBeLessThan(0.02);
        },
      ),
    );
  });

  it('is the whole compass when the circle holds the station or its antipode', () => {
    expect(bearingSpreadDeg(io53, at(53, -8), 200)).toBe(360);
    expect(bearingSpreadDeg(io53, at(-53, 171), 200)).toBe(360);
    expect(bearingSpreadDeg(io53, io53, 0)).toBe(360);
    expect(bearingSpreadDeg(io53, at(51, 9), 0)).toBe(0);
  });

  it('comes with the path in one call', () => {
    const to = at(38, -97);
    expect(pathWithSpread(io53, to, 500)).toEqual({
      ...pathTo(io53, to),
      bearingSpreadDeg: bearingSpreadDeg(io53, to, 500),
    });
  });

  it('refuses a negative radius by name', () => {
    expect(() => bearingSpreadDeg(io53, at(0, 0), -1)).toThrow(
      new RangeError('radiusKm must be zero or more, was -1'),
    );
  });
});

describe('sectors', () => {
  it.each([
    [0, 12, 0],
    [29.999, 12, 0],
    [30, 12, 1],
    [359.999, 12, 11],
    [360, 12, 0],
    [-0.001, 12, 11],
    [-1e-15, 12, 0],
    [45, 8, 1],
    [200, 1, 0],
  ])('puts azimuth %d of %d sectors into sector %d', (azimuth, count, sector) => {
    expect(sectorOf(azimuth, count)).toBe(sector);
  });

  it('puts every azimuth between the limits of its sector', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0, max: 360, noNaN: true, maxExcluded: true }),
        fc.integer({ min: 1, max: 72 }),
        (azimuth, count) => {
          const sector = sectorOf(azimuth, count);
          expect(sector).toBeLessThan(count);
          expect(azimuth).toBeGreaterThanOrEqual((sector * 360) / count - 1e-9);
          expect(azimuth).toBeLessThan(((sector + 1) * 360) / count + 1e-9);
        },
      ),
    );
  });

  it('holds a bearing for sure up to a spread of one sector, and for unsure beyond it', () => {
    expect(sectorUnsure(30, 12)).toBe(false);
    expect(sectorUnsure(30.001, 12)).toBe(true);
    expect(sectorUnsure(360, 12)).toBe(true);
    expect(sectorUnsure(Number.NaN, 12)).toBe(true);
    expect(sectorUnsure(40, 8)).toBe(false);
  });

  it.each([0, -1, 2.5, Number.NaN])('refuses %d sectors by name', (count) => {
    expect(() => sectorOf(10, count)).toThrow(
      new RangeError(`sectorCount must be a whole number of at least 1, was ${count}`),
    );
  });
});
