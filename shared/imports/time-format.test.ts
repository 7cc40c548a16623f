import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { TimeFormat } from '../contracts/import.ts';
import { isRefusal } from '../radio/place.ts';
import { compileTimeFormat, createDayRoller } from './time-format.ts';

function read(format: TimeFormat, text: string): number | string {
  const reader = compileTimeFormat(format);
  if (isRefusal(reader)) throw new Error(reader.reason);
  const ms = reader.read(text);
  return typeof ms === 'number' ? ms : ms.reason;
}
const iso = (zone = 'UTC'): TimeFormat => ({ kind: 'iso', zone });
const pattern = (text: string, zone = 'UTC'): TimeFormat => ({ kind: 'pattern', pattern: text, zone });
const at = (text: string) => Date.parse(text);
const anyMs = fc.integer({ min: Date.UTC(2000, 0, 1), max: Date.UTC(2099, 11, 31) });

describe('compileTimeFormat', () => {
  it('reads back what JavaScript writes in ISO form, to the millisecond', () => {
    fc.assert(
      fc.property(anyMs, (ms) => {
        const text = new Date(ms).toISOString();
        expect(read(iso(), text)).toBe(ms);
        expect(read(iso(), text.replace('T', ' ').replace('Z', '+00:00'))).toBe(ms);
        const second = Math.floor(ms / 1000) * 1000;
        expect(read(iso(), `${text.slice(0, 19)}Z`)).toBe(second);
        expect(read(iso(), text.slice(0, 19))).toBe(second);
        expect(read(iso(), text.slice(0, 19).replace(/[-:]/g, ''))).toBe(second);
      }),
    );
  });

  it.each([
    ['2026-01-05T18:04:30+05:30', '2026-01-05T12:34:30Z'],
    ['2026-01-05 18:04:30,25 -0330', '2026-01-05T21:34:30.250Z'],
    ['20260105T1804Z', '2026-01-05T18:04:00Z'],
    [' 2026-01-05 18:04 UTC ', '2026-01-05T18:04:00Z'],
    ['2024-02-29T00:00:00Z', '2024-02-29T00:00:00Z'],
  ])('reads %s', (text, expected) => {
    expect(read(iso(), text)).toBe(at(expected));
  });

  it.each([
    [
      '2026-02-31T18:00:00Z',
      'The time "2026-02-31T18:00:00Z" does not exist: February 2026 has 28 days, not "31".',
    ],
    [
      '2100-02-29T18:00:00Z',
      'The time "2100-02-29T18:00:00Z" does not exist: February 2100 has 28 days, not "29".',
    ],
    ['2026-13-01T18:00:00Z', 'The time "2026-13-01T18:00:00Z" does not exist: there is no month "13".'],
    [
      '2026-01-05T24:00:00Z',
      'The time "2026-01-05T24:00:00Z" does not exist: there is no hour "24"; a day has 0 to 23.',
    ],
    ['2026-01-05T18:60:00Z', 'The time "2026-01-05T18:60:00Z" does not exist: there is no minute "60".'],
    ['05.01.2026 18:00', 'The time "05.01.2026 18:00" is not in ISO form, such as 2026-01-05T18:04:30Z.'],
    ['', 'The time is empty.'],
  ])('refuses "%s" with a sentence', (text, reason) => {
    expect(read(iso(), text)).toBe(reason);
  });

  it('accepts exactly the days that the calendar has', () => {
    const days = fc.record({
      y: fc.integer({ min: 2000, max: 2400 }),
      m: fc.integer({ min: 1, max: 12 }),
      d: fc.integer({ min: 1, max: 31 }),
    });
    fc.assert(
      fc.property(days, ({ y, m, d }) => {
        const text = `${y}-${String(m).padStart(2, '0')}-${String(d).padStart(2, '0')}T12:00:00Z`;
        const date = new Date(Date.UTC(y, m - 1, d, 12));
        expect(read(iso(), text)).toSatisfy((answer: number | string) =>
          date.getUTCDate() === d ? answer === date.getTime() : typeof answer === 'string',
        );
      }),
    );
  });

  it.each([
    ['dd.MM.yyyy HH:mm:ss', '05.01.2026 18:04:30', '2026-01-05T18:04:30Z'],
    ['d/M/yy H:mm', '5/1/26 8:04', '2026-01-05T08:04:00Z'],
    ['dd-MMM-yyyy HHmm', '05-jan-2026 1804', '2026-01-05T18:04:00Z'],
    ['yyyyMMddHHmmssSSS', '20260105180430250', '2026-01-05T18:04:30.250Z'],
    ['[yyyy] MM+dd HH.mmZ', '[2026] 01+05   18.04z', '2026-01-05T18:04:00Z'],
  ])('reads the pattern %s', (form, text, expected) => {
    expect(read(pattern(form), text)).toBe(at(expected));
  });

  it.each([
    ['yyyy-MM-dd', /needs one HH and one mm/],
    ['MM-dd HH:mm', /needs one year, one month and one day/],
    ['yyyy-yyyy-MM-dd HH:mm', /needs one year/],
  ])('refuses the pattern %s', (form, reason) => {
    expect(compileTimeFormat(pattern(form))).toEqual({ reason: expect.stringMatching(reason) });
  });

  it('reads epochs in seconds and milliseconds', () => {
    expect(read({ kind: 'epoch seconds' }, '1767636270')).toBe(at('2026-01-05T18:04:30Z'));
    expect(read({ kind: 'epoch seconds' }, '1767636270.25')).toBe(at('2026-01-05T18:04:30.250Z'));
    expect(read({ kind: 'epoch milliseconds' }, '1767636270250')).toBe(at('2026-01-05T18:04:30.250Z'));
    expect(read({ kind: 'epoch seconds' }, '-5')).toMatch(/is not a count of seconds since 1970/);
  });

  it('reads wall clocks as the zone data of the platform has them, the year round', () => {
    // Intl formats what we read: the other direction, through the same public zone data.
    const zones = [
      'Europe/Dublin',
      'America/St_Johns',
      'Australia/Lord_Howe',
      'Asia/Kathmandu',
      'Pacific/Chatham',
    ];
    fc.assert(
      fc.property(fc.constantFrom(...zones), anyMs, (zone, ms) => {
        const second = Math.floor(ms / 1000) * 1000;
        const wall = new Intl.DateTimeFormat('sv-SE', {
          timeZone: zone,
          dateStyle: 'short',
          timeStyle: 'medium',
        }).format(second);
        const answer = read(iso(zone), wall);
        if (typeof answer === 'string') expect(answer).toMatch(/came twice/);
        else expect(answer).toBe(second);
      }),
      { numRuns: 60 },
    );
  });

  it('refuses wall clocks that were skipped or came twice', () => {
    // EU directive 2000/84/EC: last Sundays of March and October, 01:00 UTC.
    expect(read(iso('Europe/Dublin'), '2026-03-29 01:00:00')).toMatch(
      /does not exist in the zone "Europe\/Dublin"/,
    );
    expect(read(iso('Europe/Dublin'), '2026-03-29 02:00:00')).toBe(at('2026-03-29T01:00:00Z'));
    expect(read(iso('Europe/Dublin'), '2026-10-25 01:59:59')).toMatch(/came twice/);
    // US Energy Policy Act of 2005: second Sunday of March, 02:00 local time.
    expect(read(iso('America/New_York'), '2026-03-08 02:30:00')).toMatch(/does not exist/);
    expect(read(iso('America/New_York'), '2026-03-08 02:30:00-05:00')).toBe(at('2026-03-08T07:30:00Z'));
  });
});

describe('createDayRoller', () => {
  const minutes = (clock: string) => (Number(clock.slice(0, 2)) * 60 + Number(clock.slice(2))) * 60_000;
  const roll = (firstDay: string, clocks: string[]) => {
    const toDay = createDayRoller(firstDay);
    return clocks.map((clock) => new Date(toDay(minutes(clock))).toISOString().slice(5, 16));
  };

  it('passes midnight, takes late lines back over it, and stands long silences', () => {
    expect(roll('2026-01-31', ['2358', '0001', '2359', '0002', '0700', '1700', '0300'])).toEqual([
      ...[
        '01-31T23:58',
        '02-01T00:01',
        '01-31T23:59',
        '02-01T00:02',
        '02-01T07:00',
        '02-01T17:00',
        '02-02T03:00',
      ],
    ]);
  });

  it('gives lines in order of time, with gaps under 23 hours, their true times', () => {
    const gaps = fc.array(fc.integer({ min: 0, max: 22 * 60 + 59 }), { maxLength: 40 });
    fc.assert(
      fc.property(gaps, (steps) => {
        const toDay = createDayRoller('2026-01-05');
        let trueMs = at('2026-01-05T18:00:00Z');
        expect(toDay(trueMs % 86_400_000)).toBe(trueMs);
        for (const step of steps) {
          trueMs += step * 60_000;
          expect(toDay(trueMs % 86_400_000)).toBe(trueMs);
        }
      }),
    );
  });
});
