import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { pathTo, placeAt } from '../../../shared/radio/geodesic.ts';
import { landPath, mapPoint, rimKm, stationProjection } from './great-circle.ts';

const corrib = { latitudeDeg: 53.5, longitudeDeg: -9 };
const radius = 500;

function bearingOf([x, y]: [number, number]): number {
  return ((Math.atan2(x, -y) * 180) / Math.PI + 360) % 360;
}

function turn(one: number, other: number): number {
  return Math.abs(((one - other + 540) % 360) - 180);
}

describe('the great-circle map', () => {
  // GeographicLib manual, GeodSolve example (WGS-84): 40.6 N 73.8 W to 51.6 N 0.5 W.
  it('puts a published path at its bearing and at its distance', () => {
    const point = mapPoint(51.198882845579824, 5551.759400318679, radius);
    expect(bearingOf(point)).toBeCloseTo(51.198882845579824, 9);
    expect((Math.hypot(...point) / radius) * rimKm).toBeCloseTo(5551.759400318679, 6);
  });

  it('draws north upwards and east to the right', () => {
    const [northX, northY] = mapPoint(0, rimKm / 2, radius);
    const [eastX, eastY] = mapPoint(90, rimKm / 2, radius);
    expect([northX, northY]).toEqual([0, -radius / 2]);
    expect(eastX).toBeCloseTo(radius / 2, 9);
    expect(eastY).toBeCloseTo(0, 9);
  });

  it('keeps what lies beyond the antipode of a sphere on the rim', () => {
    expect(Math.hypot(...mapPoint(200, rimKm + 20, radius))).toBeCloseTo(radius, 9);
  });

  it('has coast lines whose directions from any station are the bearings on the ellipsoid', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -70, max: 70, noNaN: true }),
        fc.double({ min: -180, max: 180, noNaN: true }),
        fc.double({ min: 0, max: 359.9, noNaN: true }),
        // Close to the antipode the ellipsoid's shortest paths leave the sphere's by whole degrees.
        fc.double({ min: 300, max: 17_000, noNaN: true }),
        (latitude, longitude, azimuthDeg, distanceKm) => {
          const station = { latitude, longitude };
          const far = placeAt(station, azimuthDeg, distanceKm);
          const path = pathTo(station, far);
          const project = stationProjection({ latitudeDeg: latitude, longitudeDeg: longitude }, radius);
          const drawn = project([far.longitude, far.latitude])!;
          expect(turn(bearingOf(drawn), path.azimuthDeg)).toBeLessThan(0.6);
          const drawnKm = (Math.hypot(...drawn) / radius) * rimKm;
          expect(Math.abs(drawnKm / path.distanceKm - 1)).toBeLessThan(0.006);
        },
      ),
    );
  });

  /** Whether a place lies inside the drawn land: rays to the right cross its outline an odd number of times. */
  function isDrawnAsLand(latitude: number, longitude: number): boolean {
    const { azimuthDeg, distanceKm } = pathTo(
      { latitude: corrib.latitudeDeg, longitude: corrib.longitudeDeg },
      { latitude, longitude },
    );
    const [x, y] = mapPoint(azimuthDeg, distanceKm, radius);
    const rings = landPath(corrib, radius)
      .split('M')
      .slice(1)
      .map((ring) =>
        ring
          .replace('Z', '')
          .split('L')
          .map((pair) => pair.split(',').map(Number)),
      );
    const crossings = rings.flatMap((ring) =>
      ring.filter(([x1, y1], index) => {
        const [x2, y2] = ring[(index + 1) % ring.length]!;
        return y1! > y !== y2! > y && x < x1! + ((y - y1!) / (y2! - y1!)) * (x2! - x1!);
      }),
    );
    return crossings.length % 2 === 1;
  }

  it.each([
    ['central Spain', 40, -4, true],
    ['Kansas', 38.5, -98, true],
    ['central Australia', -25, 134, true],
    ['the South Pole', -89.9, 0, true],
    ['the mid North Atlantic', 40, -40, false],
    ['the mid North Pacific', 30, -160, false],
    ['the Southern Ocean near the antipode', -55, 165, false],
  ])('draws the dot of a station in %s on the right side of the coast', (_, latitude, longitude, land) => {
    expect(isDrawnAsLand(latitude, longitude)).toBe(land);
  });
});
