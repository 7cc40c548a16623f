import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  averageLevelDb,
  type CutPoint,
  cutDeviation,
  cutMetrics,
  levelAtDb,
  normaliseCut,
} from './pattern-cut.ts';

/** A cardioid (1 + cos)^2 in dB with a floor of 0.001 of its power, every `step` degrees. */
const cardioid = (step = 5, headingDeg = 0): CutPoint[] =>
  Array.from({ length: 360 / step }, (_, i) => {
    const field = (1 + Math.cos((i * step * Math.PI) / 180)) / 2;
    return { azimuthDeg: i * step + headingDeg, levelDb: 10 * Math.log10(field * field + 0.001) };
  });

describe('normaliseCut', () => {
  it('turns by the heading and puts the highest level at zero, whatever the receiver showed', () => {
    const plain = normaliseCut(cardioid());
    fc.assert(
      fc.property(
        fc.double({ min: -400, max: 400, noNaN: true }),
        fc.double({ min: -120, max: 20, noNaN: true }),
        (headingDeg, offset) => {
          const seen = cardioid(5, headingDeg).map((one) => ({ ...one, levelDb: one.levelDb + offset }));
          const cut = normaliseCut(seen.reverse(), headingDeg);
          expect(cut.map(({ azimuthDeg }) => azimuthDeg)).toEqual(plain.map(({ azimuthDeg }) => azimuthDeg));
          const furthest = Math.max(...cut.map(({ levelDb }, i) => Math.abs(levelDb - plain[i]!.levelDb)));
          expect(furthest).toBeLessThan(1e-9);
        },
      ),
    );
    expect(plain[0]).toEqual({ azimuthDeg: 0, levelDb: 0 });
  });

  it('averages readings of one azimuth', () => {
    const cut = normaliseCut([
      { azimuthDeg: 10, levelDb: -60 },
      { azimuthDeg: 370, levelDb: -64 },
      { azimuthDeg: 200, levelDb: -70 },
    ]);
    expect(cut).toEqual([
      { azimuthDeg: 10, levelDb: 0 },
      { azimuthDeg: 200, levelDb: -8 },
    ]);
  });

  it('names the argument it refuses', () => {
    expect(() => normaliseCut([])).toThrow(/^readings /);
    expect(() => normaliseCut([{ azimuthDeg: Number.NaN, levelDb: 1 }])).toThrow(/^readings\[0\] /);
    expect(() => normaliseCut(cardioid(), Infinity)).toThrow(/^headingDeg /);
  });
});

describe('averageLevelDb', () => {
  it('averages dB, or the powers they stand for', () => {
    expect(averageLevelDb([0, -20])).toBe(-10);
    // Half of full power and half of a hundredth.
    expect(averageLevelDb([0, -20], 'power')).toBeCloseTo(10 * Math.log10(0.505), 12);
    expect(averageLevelDb([-5000, -5000], 'power')).toBeCloseTo(-5000, 9);
    expect(() => averageLevelDb([])).toThrow(/^levelsDb /);
  });

  it('is never lower in power than in dB, and never above the strongest', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: -90, max: 10, noNaN: true }), { minLength: 1, maxLength: 20 }),
        (levels) => {
          const power = averageLevelDb(levels, 'power');
          expect(power).toBeGreaterThanOrEqual(averageLevelDb(levels) - 1e-9);
          expect(power).toBeLessThanOrEqual(Math.max(...levels) + 1e-9);
        },
      ),
    );
  });
});

describe('cutMetrics', () => {
  it('has the figures of a cardioid worked out by hand', () => {
    const metrics = cutMetrics(normaliseCut(cardioid(1)));
    const top = 10 * Math.log10(1.001);
    expect(metrics.frontToBackDb).toBeCloseTo(top + 30, 9);
    expect(metrics.frontToSideDb).toBeCloseTo(top - 10 * Math.log10(0.251), 9);
    expect(metrics.frontToWorstRearDb).toBeCloseTo(metrics.frontToSideDb!, 9);
    expect(metrics.peakAzimuthDeg).toBe(0);
    // ((1 + cos a) / 2)^2 + 0.001 = 1.001 / 10^0.3: a = 65.4 degrees on either side.
    const cosine = 2 * Math.sqrt(1.001 / 10 ** 0.3 - 0.001) - 1;
    expect(metrics.beamwidthDeg).toBeCloseTo((2 * Math.acos(cosine) * 180) / Math.PI, 2);
  });

  it('finds a rear lobe between the sides, and the width of a lobe that looks over north', () => {
    const cut = [
      { azimuthDeg: 0, levelDb: -1 },
      { azimuthDeg: 30, levelDb: -5 },
      { azimuthDeg: 70, levelDb: -20 },
      { azimuthDeg: 110, levelDb: -25 },
      { azimuthDeg: 150, levelDb: -9 },
      { azimuthDeg: 190, levelDb: -30 },
      { azimuthDeg: 230, levelDb: -30 },
      { azimuthDeg: 270, levelDb: -22 },
      { azimuthDeg: 310, levelDb: -6 },
      { azimuthDeg: 350, levelDb: 0 },
    ];
    const metrics = cutMetrics(cut);
    expect(metrics.frontToWorstRearDb).toBe(8);
    expect(metrics.frontToBackDb).toBeCloseTo(-1 - (-9 - 0.75 * 21), 9);
    expect(metrics.peakAzimuthDeg).toBe(350);
    // Right: -1 at 10 degrees on, -5 at 40; left: -6 at 40 degrees.
    expect(metrics.beamwidthDeg).toBeCloseTo(10 + 0.5 * 30 + 0.5 * 40, 9);
  });

  it('leaves out what the readings do not reach', () => {
    const front = [0, 20, 40, 320, 340].map((azimuthDeg) => ({
      azimuthDeg,
      levelDb: azimuthDeg === 0 ? 0 : -1,
    }));
    expect(cutMetrics(front)).toEqual({
      frontToBackDb: null,
      frontToWorstRearDb: null,
      frontToSideDb: null,
      beamwidthDeg: null,
      peakAzimuthDeg: 0,
    });
    const round = Array.from({ length: 12 }, (_, i) => ({ azimuthDeg: 30 * i, levelDb: 0 }));
    expect(cutMetrics(round)).toMatchObject({ frontToBackDb: 0, beamwidthDeg: null });
    expect(levelAtDb([{ azimuthDeg: 0, levelDb: 0 }], 10)).toBeNull();
    expect(() => cutMetrics([])).toThrow(/^cut /);
  });
});

describe('cutDeviation', () => {
  it('is the root mean square and the largest of reading less model', () => {
    const model = normaliseCut(cardioid(5));
    const measured = model
      .filter((_, i) => i % 9 === 0)
      .map((one, i) => ({ ...one, levelDb: one.levelDb + [3, -4, 0, 0, 0, 0, 0, 0][i]! }));
    const deviation = cutDeviation(measured, model);
    expect(deviation).toMatchObject({ n: 8, largestAzimuthDeg: 45 });
    expect(deviation!.rmsDb).toBeCloseTo(Math.sqrt(25 / 8), 9);
    expect(deviation!.largestDb).toBeCloseTo(-4, 9);
  });

  it('says nothing without a model at those azimuths', () => {
    expect(cutDeviation(cardioid(), [])).toBeNull();
    expect(cutDeviation([{ azimuthDeg: 90, levelDb: 0 }], [{ azimuthDeg: 0, levelDb: 0 }])).toBeNull();
  });
});
