import { describe, expect, it } from 'vitest';
import {
  countOf,
  formatAgo,
  formatBytes,
  formatCount,
  formatDb,
  formatDbInterval,
  formatDuration,
  formatHeading,
  formatKhz,
  formatLength,
  formatLevel,
  formatLocalTime,
  formatShare,
  formatUtc,
  formatUtcTime,
} from './format.ts';

describe('numbers as the screen writes them', () => {
  it('writes a difference with sign, thin space and unit', () => {
    expect(formatDb(1.84)).toBe('+1.8\u2009dB');
    expect(formatDb(-0.62)).toBe('\u22120.6\u2009dB');
  });
  it('gives no sign to a difference that rounds to zero', () => {
    expect(formatDb(0.04)).toBe('0.0\u2009dB');
    expect(formatDb(-0.04)).toBe('0.0\u2009dB');
  });
  it('says that a number is not known rather than showing NaN', () => {
    expect([formatDb(null), formatDb(Number.NaN), formatLevel(undefined), formatShare(Infinity)]).toEqual([
      'not known',
      'not known',
      'not known',
      'not known',
    ]);
  });
  it('writes an interval in words, and signs both ends when one is negative', () => {
    expect(formatDbInterval([1.1, 2.5])).toBe('1.1 to 2.5\u2009dB');
    expect(formatDbInterval([-0.4, 2.5])).toBe('\u22120.4 to +2.5\u2009dB');
    expect(formatDbInterval([-2.5, -1.1])).toBe('\u22122.5 to \u22121.1\u2009dB');
  });
  it('separates thousands by a thin space and counts one thing in the singular', () => {
    expect(formatCount(1_234_567)).toBe('1\u2009234\u2009567');
    expect(countOf(1, 'spot')).toBe('1 spot');
    expect(countOf(0, 'spot')).toBe('0 spots');
    expect(countOf(2, 'entry', 'entries')).toBe('2 entries');
  });
  it('writes headings in three figures and turns them into 0 to 359', () => {
    expect([45, 359.6, -90, 360, 7.4].map((azimuth) => formatHeading(azimuth))).toEqual([
      '045°',
      '000°',
      '270°',
      '000°',
      '007°',
    ]);
  });
  it('writes frequencies with a tenth of a kilohertz', () => {
    expect(formatKhz(1823)).toBe('1823.0\u2009kHz');
  });
});

describe('lengths in the unit that the reader chose', () => {
  it('keeps metres as they are, with one decimal only where there is one', () => {
    expect(formatLength(2.5, 'm')).toBe('2.5\u2009m');
    expect(formatLength(160, 'm')).toBe('160\u2009m');
  });
  it('turns metres into whole feet of 0.3048 m', () => {
    // 160 m / 0.3048 m = 524.93 ft.
    expect(formatLength(160, 'ft')).toBe('525\u2009ft');
  });
});

describe('times as the screen writes them', () => {
  it('marks UTC with a Z and never moves it into the zone of the browser', () => {
    expect(formatUtc('2026-11-30T18:05:09Z')).toBe('2026-11-30 18:05Z');
    expect(formatUtcTime('2026-11-30T18:05:09Z', true)).toBe('18:05:09Z');
  });
  it('says that a time is not known', () => {
    expect(formatUtc(null)).toBe('not known');
    expect(formatUtc('soon')).toBe('not known');
  });
  it('writes the clock of the station, summer time included', () => {
    expect(formatLocalTime('2026-07-01T18:05:00Z', 'Europe/Dublin')).toBe('19:05');
    expect(formatLocalTime('2026-12-01T00:05:00Z', 'Europe/Dublin')).toBe('00:05');
  });
  it('falls back to UTC in a zone that the browser does not know', () => {
    expect(formatLocalTime('2026-07-01T18:05:00Z', 'Nowhere/Else')).toBe('18:05Z');
  });
  it('writes a duration in its two largest units', () => {
    expect([0, 45, 60, 4320, 7200, 277_200, 86_400].map((seconds) => formatDuration(seconds))).toEqual([
      '0\u2009s',
      '45\u2009s',
      '1\u2009min',
      '1\u2009h 12\u2009min',
      '2\u2009h',
      '3\u2009d 5\u2009h',
      '1\u2009d',
    ]);
  });
  it('carries rounding over instead of writing 60 minutes', () => {
    expect(formatDuration(59.7)).toBe('1\u2009min');
    expect(formatDuration(3599)).toBe('1\u2009h');
    expect(formatDuration(86_390)).toBe('1\u2009d');
  });
  it('says how long ago, and how long until', () => {
    const now = Date.parse('2026-11-30T18:00:00Z');
    expect(formatAgo('2026-11-30T17:48:00Z', now)).toBe('12\u2009min ago');
    expect(formatAgo('2026-11-30T19:12:00Z', now)).toBe('in 1\u2009h 12\u2009min');
    expect(formatAgo('2026-11-30T17:59:58Z', now)).toBe('now');
  });
});

it('writes sizes of files in decimal units', () => {
  expect([0, 999, 1200, 48_300, 200_000_000, 999_600].map((bytes) => formatBytes(bytes))).toEqual([
    '0\u2009B',
    '999\u2009B',
    '1.2\u2009kB',
    '48\u2009kB',
    '200\u2009MB',
    '1.0\u2009MB',
  ]);
});
