import { Body, Observer, SearchRiseSet } from 'astronomy-engine';
import { describe, expect, it } from 'vitest';
import { browserName } from './browser-name.ts';
import { feedHint } from './feed-hint.ts';
import { sunWords } from './sun-words.ts';

const thin = (text: string) => text.replaceAll('\u2009', ' ');

describe('the words for the sun', () => {
  const corrib = { latitude: 53.5, longitude: -9 };
  const minutesIn = (words: string) => {
    const [, hours = '0', minutes = '0'] = /in (?:(\d+)\u2009h ?)?(?:(\d+)\u2009min)?$/.exec(words) ?? [];
    return Number(hours) * 60 + Number(minutes);
  };

  /** Minutes until the next rise (+1) or set (-1) by astronomy-engine, which shares no code with suncalc. */
  const minutesUntil = (turn: 1 | -1, at: string) => {
    const found = SearchRiseSet(Body.Sun, new Observer(53.5, -9, 0), turn, new Date(at), 2);
    return ((found?.date.getTime() ?? Number.NaN) - Date.parse(at)) / 60_000;
  };

  it.each([
    ['sunset', -1, '2026-12-01T15:00:00Z'],
    ['sunrise', 1, '2026-12-02T02:00:00Z'],
    ['sunset', -1, '2026-06-20T10:30:00Z'],
  ] as const)('count down to %s as an independent ephemeris does (%i, %s)', (word, turn, at) => {
    const words = sunWords(Date.parse(at), corrib);
    expect(words.startsWith(`${word} in `)).toBe(true);
    expect(Math.abs(minutesIn(words) - minutesUntil(turn, at))).toBeLessThanOrEqual(2);
  });
  it('look to the evening once the sun has risen, before and after noon', () => {
    expect(sunWords(Date.parse('2026-12-01T10:00:00Z'), corrib)).toMatch(/^sunset in 6\u2009h/);
    expect(sunWords(Date.parse('2026-12-01T13:00:00Z'), corrib)).toMatch(/^sunset in 3\u2009h/);
  });
  it('say that there is none in the polar summer and winter', () => {
    const svalbard = { latitude: 78.2, longitude: 15.6 };
    expect(sunWords(Date.parse('2026-06-21T12:00:00Z'), svalbard)).toBe('midnight sun');
    expect(sunWords(Date.parse('2026-12-21T12:00:00Z'), svalbard)).toBe('polar night');
  });
});

describe('the hint about the feeds', () => {
  const nowMs = Date.parse('2026-11-30T18:12:00Z');
  const feed = (state: 'connecting' | 'receiving' | 'silent' | 'lost' | 'off', enabled = true) => ({
    name: 'Club feed',
    enabled,
    health: { state, lastLineAt: '2026-11-30T18:00:00Z', linesLastMinute: 40, lastError: 'refused' },
  });

  it('adds up the lines of all feeds that are well', () => {
    expect(thin(feedHint([feed('receiving'), feed('receiving')], nowMs)?.words ?? '')).toBe(
      'Feed 80 lines/min',
    );
  });
  it('lets the feed in trouble speak for all', () => {
    const hint = feedHint([feed('receiving'), feed('lost')], nowMs);
    expect([hint?.level, thin(hint?.words ?? ''), hint?.detail]).toEqual([
      'bad',
      'Feed lost, last line 12 min ago',
      'Club feed: refused',
    ]);
  });
  it('is silent about feeds that are switched off', () => {
    expect(feedHint([feed('lost', false)], nowMs)).toBeNull();
  });
  it('says that a feed without a report yet is connecting', () => {
    expect(feedHint([{ name: 'New', enabled: true, health: null }], nowMs)?.words).toBe('Feed connecting');
  });
});

it('names a browser so that its owner knows it', () => {
  expect(
    [
      'Mozilla/5.0 (X11; Linux x86_64; rv:140.0) Gecko/20100101 Firefox/140.0',
      'Mozilla/5.0 (Windows NT 10.0; Win64; x64) AppleWebKit/537.36 (KHTML, like Gecko) Chrome/140.0.0.0 Safari/537.36 Edg/140.0.0.0',
      'Mozilla/5.0 (iPhone; CPU iPhone OS 18_0 like Mac OS X) AppleWebKit/605.1.15 (KHTML, like Gecko) Version/18.0 Mobile/15E148 Safari/604.1',
      'switch-box/2',
      '',
    ].map(browserName),
  ).toEqual([
    'Firefox on Linux',
    'Edge on Windows',
    'Safari on iOS',
    'switch-box/2',
    'A browser without a name',
  ]);
});
