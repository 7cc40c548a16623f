import { describe, expect, it } from 'vitest';
import { feetToMetres, metresToFeet, metresToWavelengths, wavelengthMetres } from './convert.ts';

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
});
