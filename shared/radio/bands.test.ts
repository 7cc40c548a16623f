import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BANDS, BAND_METRES, bandByLength, bandOfKhz, isBandMetres, type ItuRegion } from './bands.ts';

describe('bands', () => {
  // ITU Radio Regulations (2020), Article 5, Table of Frequency Allocations.
  it.each([
    [1810, 1, 160],
    [1850, 1, 160],
    [1850.1, 1, null],
    [1800, 1, null],
    [1800, 2, 160],
    [2000, 3, 160],
    [3800, 1, 80],
    [3800.1, 1, null],
    [4000, 2, 80],
    [3900.1, 3, null],
    [7200.1, 1, null],
    [7300, 2, 40],
    [7200.1, 3, null],
    [5351.5, 1, 60],
    [5330.5, 2, null],
    [52_500, 1, null],
    [52_500, 2, 6],
  ] as const)('takes %d kHz in Region %d for band %s', (freqKhz, region, band) => {
    expect(bandOfKhz(freqKhz, region)).toBe(band);
  });

  it.each([
    [136.5, 2200],
    [475, 630],
    [1803.3, 160],
    [3539.2, 80],
    [3955, 80],
    [5330.5, 60],
    [7012.7, 40],
    [7250, 40],
    [10_118, 30],
    [14_025, 20],
    [18_080, 17],
    [21_025, 15],
    [24_900, 12],
    [28_025, 10],
    [50_100, 6],
  ])('hears the whole world at %d kHz: band %d', (freqKhz, band) => {
    expect(bandOfKhz(freqKhz)).toBe(band);
  });

  it.each([0, -1, 1799.9, 2000.1, 3499.9, 4000.1, 6999.9, 7300.1, 27_205, 144_000, Number.NaN, Infinity])(
    'finds no band at %d kHz',
    (freqKhz) => {
      expect(bandOfKhz(freqKhz)).toBeNull();
    },
  );

  it('keeps the bands apart and in falling wavelength, so that no spot can be in two', () => {
    expect(BANDS.map(({ band }) => band)).toEqual([...BAND_METRES]);
    for (const [index, { worldKhz }] of BANDS.entries()) {
      expect(worldKhz[0]).toBeLessThan(worldKhz[1]);
      expect(worldKhz[0]).toBeGreaterThan(BANDS[index - 1]?.worldKhz[1] ?? 0);
    }
  });

  it('never gives a Region a band that the world does not have there', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 100, max: 55_000, noNaN: true }),
        fc.constantFrom<ItuRegion>(1, 2, 3),
        (freqKhz, region) => {
          const regional = bandOfKhz(freqKhz, region);
          return regional === null || regional === bandOfKhz(freqKhz);
        },
      ),
    );
  });

  it('looks a band up by its wavelength and refuses others by name', () => {
    expect(bandByLength(160).label).toBe('160 m');
    expect(isBandMetres(80)).toBe(true);
    expect(isBandMetres(75)).toBe(false);
    expect(() => bandByLength(75)).toThrow(
      new RangeError(
        'band must be one of 2200, 630, 160, 80, 60, 40, 30, 20, 17, 15, 12, 10, 6 metres, was 75',
      ),
    );
  });
});
