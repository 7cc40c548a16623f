import { Body, Observer, SearchRiseSet } from 'astronomy-engine';
import { describe, expect, it } from 'vitest';
import { decodeTime, encodeTime, presetRange, sunBackdrop } from './time-presets.ts';

const galway = { latitude: 53.5, longitude: -9 };
const tromso = { latitude: 69.65, longitude: 18.96 };
const ms = Date.parse;
const minute = 60_000;

/** Sunset and the sunrise after it, from an independent package with its own theory of the sun (VSOP87). */
function sunOf(noon: string): { sunset: number; sunrise: number } {
  const observer = new Observer(galway.latitude, galway.longitude, 0);
  const sunset = SearchRiseSet(Body.Sun, observer, -1, new Date(noon), 1)!.date;
  const sunrise = SearchRiseSet(Body.Sun, observer, +1, sunset, 1)!.date;
  return { sunset: sunset.getTime(), sunrise: sunrise.getTime() };
}
const { sunset, sunrise } = sunOf('2026-11-30T12:00:00Z');

describe('the stretches of time to choose from', () => {
  it('shows tonight from an hour before sunset to an hour after sunrise', () => {
    const { fromMs, toMs } = presetRange('tonight', ms('2026-11-30T22:00:00Z'), galway);
    expect(Math.abs(fromMs - (sunset - 60 * minute))).toBeLessThan(2 * minute);
    expect(Math.abs(toMs - (sunrise + 60 * minute))).toBeLessThan(2 * minute);
  });

  it('has the present in tonight even before the sun is low', () => {
    const now = ms('2026-11-30T13:00:00Z');
    expect(presetRange('tonight', now, galway).fromMs).toBe(now - 30 * minute);
  });

  it('shows the night before as last night and seven nights as a week', () => {
    const now = ms('2026-11-30T22:00:00Z');
    const last = presetRange('last-night', now, galway);
    const nightBefore = sunOf('2026-11-29T12:00:00Z');
    expect(Math.abs(last.toMs - (nightBefore.sunrise + 60 * minute))).toBeLessThan(2 * minute);
    const week = presetRange('week', now, galway);
    expect(Math.round((week.toMs - week.fromMs) / (1440 * minute))).toBe(7);
  });

  it('falls back on noon to noon where the sun does not rise', () => {
    const { fromMs, toMs } = presetRange('tonight', ms('2026-12-21T22:00:00Z'), tromso);
    expect(toMs - fromMs).toBe(1440 * minute);
  });
});

describe('time in the address', () => {
  it('reads a preset and writes it back, tonight being the default', () => {
    expect(decodeTime({})).toEqual({ preset: 'tonight' });
    expect(decodeTime({ show: 'week' })).toEqual({ preset: 'week' });
    expect(encodeTime({ preset: 'week' })).toEqual({ show: 'week' });
    expect(encodeTime({ preset: 'tonight' })).toEqual({});
  });

  it('reads a stretch of its own and writes it back', () => {
    const query = { from: '2026-11-30T18:00:00Z', to: '2026-11-30T20:30:00Z' };
    const choice = decodeTime(query);
    expect(choice).toEqual({ range: { fromMs: ms(query.from), toMs: ms(query.to) } });
    expect(encodeTime(choice)).toEqual(query);
  });

  it('reads what makes no sense as tonight', () => {
    const from = '2026-11-30T18:00:00Z';
    expect(decodeTime({ from, to: '2026-11-30T17:00:00Z' })).toEqual({ preset: 'tonight' });
    expect(decodeTime({ from, to: '2028-11-30T17:00:00Z' })).toEqual({ preset: 'tonight' });
    expect(decodeTime({ from, to: 'soon' })).toEqual({ preset: 'tonight' });
    expect(decodeTime({ show: 'yesterday' })).toEqual({ preset: 'tonight' });
  });
});

describe('the sun behind the time line', () => {
  it('is dark from sunset to sunrise', () => {
    const range = { fromMs: ms('2026-11-30T12:00:00Z'), toMs: ms('2026-12-01T12:00:00Z') };
    const { dark, turns } = sunBackdrop(range, galway);
    expect(turns.map(({ kind }) => kind)).toEqual(['sunset', 'sunrise']);
    expect(dark).toHaveLength(1);
    expect(Math.abs(dark[0]!.fromMs - sunset)).toBeLessThan(2 * minute);
    expect(Math.abs(dark[0]!.toMs - sunrise)).toBeLessThan(2 * minute);
  });

  it('fills a view inside the night and leaves one inside the day empty', () => {
    const night = { fromMs: ms('2026-11-30T22:00:00Z'), toMs: ms('2026-11-30T23:00:00Z') };
    expect(sunBackdrop(night, galway)).toEqual({ dark: [night], turns: [] });
    const day = { fromMs: ms('2026-11-30T12:00:00Z'), toMs: ms('2026-11-30T13:00:00Z') };
    expect(sunBackdrop(day, galway)).toEqual({ dark: [], turns: [] });
  });

  it('is dark throughout in the polar night, over several days', () => {
    const range = { fromMs: ms('2026-12-20T00:00:00Z'), toMs: ms('2026-12-23T00:00:00Z') };
    expect(sunBackdrop(range, tromso).dark).toEqual([range]);
  });

  it('has one stretch a night over a week', () => {
    const range = { fromMs: ms('2026-11-20T12:00:00Z'), toMs: ms('2026-11-27T12:00:00Z') };
    expect(sunBackdrop(range, galway).dark).toHaveLength(7);
  });
});
