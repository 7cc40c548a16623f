import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { averageGainDb, gainAtDb, patternGrid, type PatternPoint, rdf } from './pattern.ts';

/** A pattern given as power over a grid of the usual step. */
function table(
  powerAt: (azimuthDeg: number, elevationDeg: number) => number,
  { lowest = 0, step = 5 } = {},
): PatternPoint[] {
  const points: PatternPoint[] = [];
  for (let elevationDeg = lowest; elevationDeg <= 90; elevationDeg += step) {
    for (let azimuthDeg = 0; azimuthDeg < 360; azimuthDeg += step) {
      const power = Math.max(powerAt(azimuthDeg, elevationDeg), 1e-30);
      points.push({ azimuthDeg, elevationDeg, gainDb: 10 * Math.log10(power) });
    }
  }
  return points;
}

const cosDeg = (degrees: number) => Math.cos((degrees * Math.PI) / 180);
const sinDeg = (degrees: number) => Math.sin((degrees * Math.PI) / 180);

// Directivities in closed form (antenna handbooks, e.g. Balanis, Antenna Theory, chapters 2 and 4).
describe('average gain and RDF', () => {
  it.each([
    {
      name: 'an ideal short monopole over perfect ground: 3, that is 4.7712 dB',
      expected: 4.7712,
      exact: 10 * Math.log10(3),
      powerAt: (_: number, elevation: number) => cosDeg(elevation) ** 2,
      overGround: true,
    },
    {
      // Handbooks print 1.643; 4 / Cin(2 pi) is 1.6409 (Cin by R 4.2.2 gsl::Ci).
      name: 'a half-wave dipole in free space: 1.643, that is 2.156 dB',
      expected: 2.156,
      exact: 10 * Math.log10(4 / 2.4376534),
      powerAt: (_: number, elevation: number) =>
        Math.abs(elevation) === 90
          ? 0
          : (Math.cos((Math.PI / 2) * sinDeg(elevation)) / cosDeg(elevation)) ** 2,
      overGround: false,
    },
    {
      // (1 + cos)^2 of the angle from the axis, which points north along the horizon.
      name: 'a cardioid in free space: 3, that is 4.7712 dB',
      expected: 4.7712,
      exact: 10 * Math.log10(3),
      powerAt: (azimuth: number, elevation: number) => (1 + cosDeg(azimuth) * cosDeg(elevation)) ** 2,
      overGround: false,
    },
  ])('is right for $name', ({ expected, exact, powerAt, overGround }) => {
    const result = rdf(table(powerAt, { lowest: overGround ? 0 : -90 }), { overGround });
    expect(Math.abs(result.rdfDb / expected - 1)).toBeLessThan(0.005);
    expect(result.elevationDeg).toBeCloseTo(0, 9);
    const fine = rdf(table(powerAt, { lowest: overGround ? 0 : -90, step: 1 }), { overGround });
    expect(Math.abs(fine.rdfDb - exact)).toBeLessThan(0.0005);
  });

  // Common practice in the trade, no source: a short vertical has about 5 dB, give or take 0.3.
  it('gives a short vertical about 5 dB', () => {
    const { rdfDb } = rdf(table((_, elevation) => cosDeg(elevation) ** 2));
    expect(Math.abs(rdfDb - 5)).toBeLessThan(0.3);
  });

  it('is exact for an isotropic pattern on any grid: 0 dB in free space, 3.01 dB over ground', () => {
    for (const step of [1, 5, 10, 15]) {
      expect(
        averageGainDb(
          patternGrid(
            table(() => 1, { lowest: -90, step }),
            { overGround: false },
          ),
        ),
      ).toBeCloseTo(0, 12);
      expect(rdf(table(() => 1, { step })).rdfDb).toBeCloseTo(10 * Math.log10(2), 12);
    }
  });

  it('does not depend on gain all round, on the heading or on the order of the points', () => {
    const points = table((azimuth, elevation) => (1 + cosDeg(azimuth - 40)) ** 2 * cosDeg(elevation) + 0.01, {
      step: 10,
    });
    const plain = rdf(points).rdfDb;
    fc.assert(
      fc.property(
        fc.double({ min: -40, max: 40, noNaN: true }),
        fc.integer({ min: -720, max: 720 }),
        (gain, heading) => {
          const moved = points.map((point) => ({
            ...point,
            gainDb: point.gainDb + gain,
            azimuthDeg: point.azimuthDeg + heading,
          }));
          expect(rdf(moved.reverse()).rdfDb).toBeCloseTo(plain, 9);
        },
      ),
      { numRuns: 25 },
    );
  });

  it('takes the gain in the wanted direction, between the points too', () => {
    const points = table(
      (azimuth, elevation) => 10 ** ((azimuth < 180 ? azimuth : 360 - azimuth) / 100 + elevation / 50),
    );
    const grid = patternGrid(points);
    expect(gainAtDb(grid, 42, 13)).toBeCloseTo(10 * (0.42 + 0.26), 9);
    expect(gainAtDb(grid, -2.5, 90)).toBeCloseTo(10 * (0.025 + 1.8), 9);
    expect(gainAtDb(grid, 718, 0)).toBeCloseTo(0.2, 9);
    const wanted = { azimuthDeg: 42, elevationDeg: 13 };
    const result = rdf(points, { wanted });
    expect(result).toMatchObject(wanted);
    expect(result.rdfDb).toBeCloseTo(6.8 - averageGainDb(grid), 9);
    expect(() => gainAtDb(grid, 0, -1)).toThrow(/^elevationDeg /);
    expect(() => gainAtDb(grid, Number.NaN, 1)).toThrow(/^azimuthDeg /);
  });

  it('leaves out what lies below ground, and takes 360 degrees for north', () => {
    const points = table(() => 1, { lowest: -90 });
    const closed = [...points, { azimuthDeg: 360, elevationDeg: 0, gainDb: 0 }];
    expect(rdf(closed).rdfDb).toBeCloseTo(10 * Math.log10(2), 12);
  });

  it('says which direction is missing, doubled or too far from its neighbours', () => {
    const points = table(() => 1);
    const without = (fits: (point: PatternPoint) => boolean) => () =>
      rdf(points.filter((point) => !fits(point)));
    expect(without(({ azimuthDeg, elevationDeg }) => azimuthDeg === 35 && elevationDeg === 20)).toThrow(
      'points must hold a gain at azimuth 35, elevation 20',
    );
    expect(without(({ elevationDeg }) => elevationDeg === 90)).toThrow(
      /^points must reach from elevation 0 to 90/,
    );
    expect(without(({ elevationDeg }) => elevationDeg > 20 && elevationDeg < 40)).toThrow(
      /between 20 and 40/,
    );
    expect(without(({ azimuthDeg }) => azimuthDeg > 320)).toThrow(/between 320 and 0/);
    expect(() => rdf(points, { overGround: false })).toThrow(/^points must reach from elevation -90/);
    expect(() => rdf([...points, { azimuthDeg: 0, elevationDeg: 0, gainDb: 3 }])).toThrow(
      'points hold two gains at azimuth 0, elevation 0: 0 and 3 dB',
    );
    expect(() => rdf([{ azimuthDeg: 0, elevationDeg: 91, gainDb: 0 }])).toThrow(/^points\[0\] /);
    expect(() => rdf([{ azimuthDeg: 0, elevationDeg: 9, gainDb: Number.NaN }])).toThrow(/^points\[0\] /);
    expect(() => rdf([])).toThrow(/^points must reach/);
  });
});
