import { describe, expect, it } from 'vitest';
import {
  feetToMetres,
  heightMetresAtElevation,
  impedanceRatio,
  metresToFeet,
  metresToWavelengths,
  wavelengthMetres,
} from './convert.ts';

describe('conversions', () => {
  // Common practice in the trade; the foot is 0.3048 m exactly (international agreement of 1959).
  it('turns 1000 feet into 304.8 metres and back', () => {
    expect(feetToMetres(1000)).toBeCloseTo(304.8, 9);
    expect(metresToFeet(304.8)).toBeCloseTo(1000, 9);
  });

  // Common practice in the trade: 163.8 m at 1.83 MHz.
  it('finds a wave of 163.8 metres at 1830 kHz', () => {
    expect(Math.abs(wavelengthMetres(1830) - 163.8)).toBeLessThan(0.05);
    expect(metresToWavelengths(163.8, 1830)).toBeCloseTo(1, 3);
  });

  it.each([0, -1830, Number.NaN])('refuses the frequency %d kHz by name', (freqKhz) => {
    expect(() => wavelengthMetres(freqKhz)).toThrow(RangeError(`freqKhz must be positive, was ${freqKhz}`));
  });

  // Common practice in the trade: 15 degrees at a kilometre takes a source 267.9 m up.
  it('puts a source 267.9 metres up for 15 degrees at 1000 metres', () => {
    expect(Math.abs(heightMetresAtElevation(1000, 15) - 267.9)).toBeLessThan(0.05);
    expect(heightMetresAtElevation(500, 0)).toBe(0);
    expect(heightMetresAtElevation(50, 45)).toBeCloseTo(50, 12);
    expect(() => heightMetresAtElevation(0, 15)).toThrow(/^distanceMetres /);
    expect(() => heightMetresAtElevation(100, 90)).toThrow(/^elevationDeg /);
    expect(() => heightMetresAtElevation(100, Number.NaN)).toThrow(/^elevationDeg /);
  });

  // Common practice in the trade: 3 to 6 turns match impedances of 1 to 4.
  it('squares the turns of a transformer into its impedance ratio', () => {
    expect(impedanceRatio(3, 6)).toBe(4);
    expect(impedanceRatio(6, 3)).toBe(4);
    expect(() => impedanceRatio(0, 6)).toThrow(/^turns /);
    expect(() => impedanceRatio(3, Number.NaN)).toThrow(/^otherTurns /);
  });
});
