import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BAND_METRES } from '../../../shared/radio/bands.ts';
import {
  decodeFilter,
  encodeFilter,
  everySpot,
  filterQuery,
  fromTimeInput,
  mapRange,
  toTimeInput,
} from './spot-filter.ts';
import type { SpotFilter } from './spot-filter.ts';

const instants = fc
  .integer({ min: Date.UTC(2000, 0, 1) / 1000, max: Date.UTC(2100, 0, 1) / 1000 })
  .map((seconds) => new Date(seconds * 1000).toISOString());
const ids = fc.option(fc.integer({ min: 1, max: 2_000_000_000 }));
const filters: fc.Arbitrary<SpotFilter> = fc.record({
  from: fc.option(instants),
  to: fc.option(instants),
  bandMetres: fc.option(fc.constantFrom(...BAND_METRES)),
  receiverId: ids,
  antennaId: ids,
  call: fc.constantFrom('', 'EA8QSH', 'W1QSK/P'),
  tag: fc.option(fc.constantFrom('tagged', 'guarded', 'untagged')),
});

describe('the filter of spots in the address', () => {
  it('comes back from the address as it went in', () => {
    fc.assert(
      fc.property(filters, (filter) => {
        expect(decodeFilter(encodeFilter(filter))).toEqual({ filter, problems: [] });
      }),
    );
  });

  it('leaves out what it cannot read, and says so for each part', () => {
    const { filter, problems } = decodeFilter({
      from: 'yesterday',
      band: '161',
      receiver: '0',
      tag: 'guard',
      call: 'ea8qsh',
      live: '1',
    });
    expect(filter).toEqual({ ...everySpot, call: 'EA8QSH' });
    expect(problems).toEqual([
      'The address says "from=yesterday"; a time reads 2026-11-30T18:05:00Z. It was left out.',
      'The address says "band=161"; a band reads 160. It was left out.',
      'The address says "receiver=0"; a receiver is given by its number. It was left out.',
      'The address says "tag=guard"; a tag is tagged, guarded or untagged. It was left out.',
    ]);
  });

  it('asks the server for nothing that was not asked', () => {
    expect(Object.values(filterQuery(everySpot)).every((value) => value === undefined)).toBe(true);
  });
});

describe('times as they are typed', () => {
  it.each([
    ['2026-11-30 18:05', '2026-11-30T18:05:00Z'],
    ['2026-11-30T18:05:09Z', '2026-11-30T18:05:09Z'],
    [' 2026-11-30 ', '2026-11-30T00:00:00Z'],
    ['', null],
    ['2026-02-30 10:00', undefined],
    ['2026-11-30 25:00', undefined],
    ['30.11.2026 18:05', undefined],
    ['tonight', undefined],
  ])('reads "%s" as %s', (text, at) => {
    expect(fromTimeInput(text)).toBe(at);
  });

  it('are written so that they read as the same second', () => {
    fc.assert(
      fc.property(instants, (at) => {
        expect(Date.parse(fromTimeInput(toTimeInput(at))!)).toBe(Date.parse(at));
      }),
    );
  });
});

describe('the time of the map', () => {
  const now = Date.UTC(2026, 11, 1, 12);
  it('is the day up to the newest spot, that spot with it, where none was chosen', () => {
    expect(mapRange({ from: null, to: null }, '2026-11-20T06:00:00.500Z', now)).toEqual({
      from: '2026-11-19T06:00:01.500Z',
      to: '2026-11-20T06:00:01.500Z',
    });
  });
  it('runs to the present from a chosen start', () => {
    expect(mapRange({ from: '2026-11-30T18:00:00Z', to: null }, null, now)).toEqual({
      from: '2026-11-30T18:00:00Z',
      to: '2026-12-01T12:00:00.000Z',
    });
  });
  it('is the day before a chosen end', () => {
    expect(mapRange({ from: null, to: '2026-11-30T18:00:00Z' }, null, now)).toEqual({
      from: '2026-11-29T18:00:00.000Z',
      to: '2026-11-30T18:00:00Z',
    });
  });
});
