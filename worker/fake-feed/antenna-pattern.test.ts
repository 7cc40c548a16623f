import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { meanGainDb, patternGainDb, type AntennaPattern } from './antenna-pattern.ts';

const wire: AntennaPattern = {
  headingDeg: 55,
  shape: { lobe: 'single', rearDb: 12, sharpness: 1 },
  peakDb: { 160: 5, 80: 6 },
};
const open: AntennaPattern = {
  headingDeg: 170,
  shape: { lobe: 'double', sideDb: 8, sharpness: 1 },
  peakDb: { 160: 3 },
};

describe('an antenna pattern', () => {
  it('peaks toward the heading and is weakest behind, by the stated front-to-back', () => {
    expect(patternGainDb(wire, 160, 55)).toBeCloseTo(5, 12);
    expect(patternGainDb(wire, 160, 235)).toBeCloseTo(5 - 12, 12);
    expect(patternGainDb(wire, 80, 415)).toBeCloseTo(6, 12);
  });

  it('of two lobes is as good behind as ahead and weakest at the sides', () => {
    expect(patternGainDb(open, 160, 170)).toBeCloseTo(3, 12);
    expect(patternGainDb(open, 160, 350)).toBeCloseTo(3, 12);
    expect(patternGainDb(open, 160, 80)).toBeCloseTo(3 - 8, 12);
  });

  it('is symmetric about the heading, repeats after a turn and never passes its peak', () => {
    fc.assert(
      fc.property(fc.constantFrom(wire, open), fc.integer({ min: -720, max: 720 }), (pattern, off) => {
        const gainDb = patternGainDb(pattern, 160, pattern.headingDeg + off);
        expect(gainDb).toBeCloseTo(patternGainDb(pattern, 160, pattern.headingDeg - off), 9);
        expect(gainDb).toBeCloseTo(patternGainDb(pattern, 160, pattern.headingDeg + off + 360), 9);
        expect(gainDb).toBeLessThanOrEqual(pattern.peakDb[160]! + 1e-12);
      }),
    );
  });

  it('changes by under half a dB over five degrees', () => {
    for (let azimuthDeg = 0; azimuthDeg < 360; azimuthDeg += 5) {
      const stepDb = patternGainDb(wire, 160, azimuthDeg + 5) - patternGainDb(wire, 160, azimuthDeg);
      expect(Math.abs(stepDb)).toBeLessThan(0.55);
    }
  });

  it('has the mean gain that calculus gives', () => {
    // Means of (1 - cos x) / 2 and of sin^2 x over a turn are both one half.
    expect(meanGainDb(wire, 160)).toBeCloseTo(5 - 6, 6);
    expect(meanGainDb(open, 160)).toBeCloseTo(3 - 4, 6);
  });

  it('names the band that it has no value for', () => {
    expect(() => patternGainDb(open, 40, 0)).toThrow('no pattern for the 40 m band');
  });
});
