import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { pathTo } from './geodesic.ts';
import { locatorOf, parseLocator, type LocatorCell, type LocatorLength } from './locator.ts';
import { isRefusal } from './place.ts';

function cellOf(text: string): LocatorCell {
  const cell = parseLocator(text);
  if (isRefusal(cell)) throw new Error(cell.reason);
  return cell;
}

function reasonOf(text: string): string {
  const refusal = parseLocator(text);
  return isRefusal(refusal) ? refusal.reason : 'accepted';
}

const lengths = fc.constantFrom<LocatorLength>(2, 4, 6, 8);
const places = fc.record({
  latitude: fc.double({ min: -90, max: 90, noNaN: true }),
  longitude: fc.double({ min: -180, max: 180, noNaN: true }),
});

describe('locators', () => {
  // Maidenhead locator system (IARU Region 1, 1980): worked positions in wide circulation.
  it.each([
    [48.14666, 11.60833, 'JN58td'],
    [-34.91, -56.21166, 'GF15vc'],
    [38.92, -77.065, 'FM18lw'],
    [-41.28333, 174.745, 'RE78ir'],
    [41.714775, -72.72726, 'FN31pr'],
    [37.413708, -122.1073236, 'CM87wj'],
  ])('finds %d, %d in %s', (latitude, longitude, locator) => {
    expect(locatorOf({ latitude, longitude })).toBe(locator);
  });

  it.each([
    ['IO', 55, -10, 20, 10],
    ['IO53', 53.5, -9, 2, 1],
    ['io53AA', 53 + 1.25 / 60, -10 + 2.5 / 60, 5 / 60, 2.5 / 60],
    ['JJ00AA00', 7.5 / 3600, 15 / 3600, 30 / 3600, 15 / 3600],
  ])('reads %s with its centre and size', (text, latitude, longitude, widthDeg, heightDeg) => {
    const cell = cellOf(text);
    expect(cell.latitude).toBeCloseTo(latitude, 10);
    expect(cell.longitude).toBeCloseTo(longitude, 10);
    expect(cell.widthDeg).toBeCloseTo(widthDeg, 10);
    expect(cell.heightDeg).toBeCloseTo(heightDeg, 10);
  });

  it('writes the field in capitals and the subsquare in small letters', () => {
    expect(cellOf(' io53AB12 ').locator).toBe('IO53ab12');
  });

  it('keeps every place inside the cell it names, and names the cell again from its centre', () => {
    fc.assert(
      fc.property(places, lengths, (place, length) => {
        const cell = cellOf(locatorOf(place, length));
        expect(cell.locator).toHaveLength(length);
        // A place within rounding of a border (2 mm) may be given to the neighbour.
        expect(Math.abs(place.latitude - cell.latitude)).toBeLessThanOrEqual(
          cell.heightDeg / 2 + 2e-8 + 1e-12,
        );
        const east = Math.abs(place.longitude - cell.longitude);
        expect(Math.min(east, 360 - east)).toBeLessThanOrEqual(cell.widthDeg / 2 + 2e-8 + 1e-12);
        expect(locatorOf(cell, length)).toBe(cell.locator);
      }),
    );
  });

  it('covers the whole cell with its radius', () => {
    fc.assert(
      fc.property(places, lengths, (place, length) => {
        const cell = cellOf(locatorOf(place, length));
        for (const north of [-0.5, 0.5]) {
          const corner = {
            latitude: cell.latitude + north * cell.heightDeg,
            longitude: cell.longitude + cell.widthDeg / 2,
          };
          expect(pathTo(cell, corner).distanceKm).toBeLessThanOrEqual(cell.radiusKm);
        }
      }),
    );
  });

  it('lets the poles and the date line belong to one cell each', () => {
    expect(locatorOf({ latitude: 90, longitude: 0 }, 4)).toBe('JR09');
    expect(locatorOf({ latitude: -90, longitude: -180 }, 8)).toBe('AA00aa00');
    expect(locatorOf({ latitude: 0, longitude: 180 }, 4)).toBe('AJ00');
  });

  it.each([
    ['IO5', 'A locator has 2, 4, 6 or 8 characters, such as IO53 or IO53ab; "IO5" has 3.'],
    ['', 'A locator has 2, 4, 6 or 8 characters, such as IO53 or IO53ab; "" has 0.'],
    ['SO53', 'The first pair of the locator "SO53" is "SO"; it must be two letters A to R.'],
    ['IOA3', 'The second pair of the locator "IOA3" is "A3"; it must be two digits.'],
    ['IO53yz', 'The third pair of the locator "IO53yz" is "yz"; it must be two letters A to X.'],
    ['IO53ab1x', 'The fourth pair of the locator "IO53ab1x" is "1x"; it must be two digits.'],
  ])('refuses "%s" with a sentence', (text, reason) => {
    expect(reasonOf(text)).toBe(reason);
  });

  it('answers every text with a cell or a sentence', () => {
    fc.assert(
      fc.property(fc.oneof(fc.string(), fc.string({ unit: 'binary', maxLength: 9 })), (text) => {
        const cell = parseLocator(text);
        if (isRefusal(cell)) expect(cell.reason).toMatch(/\.$/);
        else expect(cell.locator.toUpperCase()).toBe(text.trim().toUpperCase());
      }),
    );
  });

  it.each([
    [{ latitude: 90.1, longitude: 0 }, 'latitude must be between -90 and 90 degrees, was 90.1'],
    [{ latitude: 0, longitude: -181 }, 'longitude must be between -180 and 180 degrees, was -181'],
  ])('refuses the place %o by name', (place, message) => {
    expect(() => locatorOf(place)).toThrow(new RangeError(message));
  });
});
