import { Body, Observer, SearchRiseSet } from 'astronomy-engine';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { openQuestion } from '../../../shared/contracts/comparison-url.ts';
import { cell, fixtureAnswer } from '../../../shared/pictures/answer.fixture.ts';
import { addDays, addMonths, clickNight, weeksOf } from './calendar.ts';
import {
  betterWords,
  cellWords,
  hourWords,
  lightsUp,
  pictureSummary,
} from '../../../shared/pictures/cell-words.ts';
import { pointAt, sectorAt, sectorsBetween } from './compass.ts';
import { halfWeightWords, heardOnlyWords, pText } from '../../../shared/pictures/fairness-words.ts';
import { blanksOf, narrowQuestion } from './narrow-question.ts';
import { markAt, nightStrip, placeOfMark } from './night-strip.ts';

const corrib = { latitude: 53.5, longitude: -9 };

describe('the compass', () => {
  it.each([
    [0, -10, 0],
    [10, -10, 1],
    [10, 0, 3],
    [0, 10, 6],
    [-10, 0, 9],
    [-0.01, -10, 11],
  ])('finds the sector under a point %d right and %d down', (dx, dy, sector) => {
    expect(sectorAt(dx, dy, 12)).toBe(sector);
  });

  it('finds the sector in whose middle a point was put, for every number of sectors', () => {
    fc.assert(
      fc.property(
        fc.constantFrom(4, 6, 8, 12, 16, 18, 24, 36),
        fc.nat(35),
        fc.integer({ min: 1, max: 500 }),
        (count, any, radius) => {
          const sector = any % count;
          const [x, y] = pointAt(((sector + 0.5) * 360) / count, radius);
          expect(sectorAt(x, y, count)).toBe(sector);
        },
      ),
    );
  });

  it('knows no direction at its centre', () => {
    expect(sectorAt(0, 0, 12)).toBeNull();
  });

  it('takes ranges clockwise, over north too; the same end twice is all the way round', () => {
    expect(sectorsBetween(1, 3, 12)).toEqual([1, 2]);
    expect(sectorsBetween(11, 2, 12)).toEqual([0, 1, 11]);
    expect(sectorsBetween(5, 5, 12)).toHaveLength(12);
  });
});

describe('the night strip', () => {
  const strip = nightStrip('2026-11-15', corrib);

  // Astronomy Engine, an independent implementation, gives sunset and sunrise.
  it('has the sun set and rise where an independent almanac says', () => {
    const noon = new Date('2026-11-15T12:36:00Z');
    const observer = new Observer(corrib.latitude, corrib.longitude, 0);
    const hoursOn = (way: 1 | -1) =>
      (SearchRiseSet(Body.Sun, observer, way, noon, 1)!.date.getTime() - noon.getTime()) / 3_600_000;
    expect(strip.startUtcHour).toBeCloseTo(12.6, 6);
    expect(strip.sunset).toBeCloseTo(hoursOn(-1), 2);
    expect(strip.sunrise).toBeCloseTo(hoursOn(1), 2);
    expect(strip.sun[0]!.altitudeDeg).toBeGreaterThan(15);
    expect(strip.sun[24]!.altitudeDeg).toBeLessThan(-45);
  });

  it('puts every mark back where it was taken from, to a quarter of an hour', () => {
    const reference = fc.constantFrom('utc' as const, 'sunset' as const, 'sunrise' as const);
    fc.assert(
      fc.property(fc.double({ min: 0.2, max: 23.8, noNaN: true }), reference, (place, from) => {
        const mark = markAt(place, from, strip);
        fc.pre(mark.hours > -12 && mark.hours < 24);
        expect(Math.abs(placeOfMark(mark, strip)! - place)).toBeLessThanOrEqual(0.126);
      }),
    );
  });

  it('says so when a mark hangs on a sunset that there is not', () => {
    const polar = nightStrip('2026-06-21', { latitude: 70, longitude: 20 });
    expect(polar.sunset).toBeNull();
    expect(placeOfMark({ reference: 'sunset', hours: 1 }, polar)).toBeNull();
    expect(placeOfMark({ reference: 'utc', hours: 22 }, polar)).toBeCloseTo(11.333, 2);
  });
});

describe('the calendar of nights', () => {
  it('shows whole weeks from Monday', () => {
    const weeks = weeksOf('2026-11');
    expect(weeks[0]!.map(({ date }) => date)).toEqual([
      '2026-10-26',
      '2026-10-27',
      '2026-10-28',
      '2026-10-29',
      '2026-10-30',
      '2026-10-31',
      '2026-11-01',
    ]);
    expect(weeks).toHaveLength(6);
    expect(weeks.flat().filter(({ inMonth }) => inMonth)).toHaveLength(30);
    expect(
      weeksOf('2024-02')
        .flat()
        .filter(({ inMonth }) => inMonth),
    ).toHaveLength(29);
  });

  it('turns months and days over the end of a year', () => {
    expect(addMonths('2026-12', 1)).toBe('2027-01');
    expect(addMonths('2026-01', -1)).toBe('2025-12');
    expect(addDays('2026-12-31', 1)).toBe('2027-01-01');
  });

  it('takes two clicks as first and last night, in either order', () => {
    const first = clickNight({ from: null, to: null }, '2026-11-10');
    expect(first).toEqual({ from: '2026-11-10', to: '2026-11-10' });
    expect(clickNight(first, '2026-11-20')).toEqual({ from: '2026-11-10', to: '2026-11-20' });
    expect(clickNight(first, '2026-11-02')).toEqual({ from: '2026-11-02', to: '2026-11-10' });
    expect(clickNight({ from: '2026-11-01', to: '2026-11-20' }, '2026-11-05')).toEqual({
      from: '2026-11-05',
      to: '2026-11-05',
    });
  });
});

describe('narrowing the question to a cell', () => {
  const draft = { ...openQuestion, antennaA: 1, antennaB: 2, bandsMetres: [160, 80] };

  it('asks about a sector and leaves the rest as it was', () => {
    const sector = cell({ sector: 4, estimateDb: 1, clusters: 9 });
    expect(narrowQuestion(draft, sector, 'utc')).toEqual({ ...draft, sectors: [4] });
    expect(blanksOf(sector)).toEqual(['sectors']);
  });

  it('asks about one hour of one band', () => {
    const hour = cell({ bandMetres: 80, hour: 23, estimateDb: 1, clusters: 9 });
    expect(narrowQuestion(draft, hour, 'utc')).toMatchObject({
      bandsMetres: [80],
      hours: { from: { reference: 'utc', hours: 23 }, to: { reference: 'utc', hours: 0 } },
    });
    expect(narrowQuestion(draft, { ...hour, hour: -2 }, 'sunrise')).toMatchObject({
      hours: { from: { reference: 'sunrise', hours: -2 }, to: { reference: 'sunrise', hours: -1 } },
    });
    expect(blanksOf(hour)).toEqual(['bands', 'hours']);
  });

  it('asks about one night', () => {
    const night = cell({ night: '2026-11-03', estimateDb: 1, clusters: 9 });
    expect(narrowQuestion(draft, night, 'utc')).toMatchObject({
      fromNight: '2026-11-03',
      toNight: '2026-11-03',
    });
    expect(blanksOf(null)).toEqual([]);
  });
});

describe('the words of a cell', () => {
  const answer = fixtureAnswer();

  it('name the antenna that hears better, whichever side it is on', () => {
    expect(betterWords(2.04, answer)).toBe('North-east wire hears better by 2.0\u2009dB');
    expect(betterWords(-0.5, answer)).toBe('Vertical hears better by 0.5\u2009dB');
    expect(betterWords(0.04, answer)).toBe('No difference');
  });

  it('say what is missing instead of a number when there is not enough evidence', () => {
    const quiet = cell({ sector: 3, estimateDb: 9, clusters: 5, nights: 2 });
    expect(cellWords(quiet, answer)).toBe(
      'Not enough evidence: 10 units, 5 station-nights in 2 nights; 8 station-nights from 3 nights are needed.',
    );
    expect(cellWords({ ...quiet, night: '2026-11-03', sector: null }, answer)).toContain(
      '8 stations are needed',
    );
  });

  it('say hours by the clock or from the sun', () => {
    expect(hourWords(23, 'utc')).toBe('23:00 to 00:00 UTC');
    expect(hourWords(0, 'sunset')).toBe('0 to 1\u2009h after sunset');
    expect(hourWords(-3, 'sunrise')).toBe('2 to 3\u2009h before sunrise');
  });

  it('light up what shares a band, an hour, a sector or a night, and nothing else', () => {
    const lit = cell({ bandMetres: 160, hour: 22, estimateDb: 1, clusters: 9 });
    expect(lightsUp(lit, { ...lit, hour: 3 })).toBe(true);
    expect(lightsUp(lit, { ...lit, bandMetres: 80 })).toBe(true);
    expect(lightsUp(lit, { ...lit, bandMetres: 80, hour: 3 })).toBe(false);
    expect(lightsUp(lit, cell({ sector: 1, estimateDb: 1, clusters: 9 }))).toBe(false);
    expect(lightsUp(null, lit)).toBe(false);
  });

  it('sum a picture up by its ends', () => {
    const summary = pictureSummary(answer.sectors, answer, 'sector');
    expect(summary).toMatch(
      /^9 of 11 sectors with units have enough evidence\. From \u22123\.5\u2009dB \(210-240 degrees\)/,
    );
    expect(pictureSummary([], answer, 'night')).toBe('No night has enough evidence yet.');
  });
});

describe('the words of fairness', () => {
  const { antennas } = fixtureAnswer();
  const heardOnly = fixtureAnswer().fairness.heardOnly!;

  it('turn the odds ratio to the antenna that was more often the only one', () => {
    expect(heardOnlyWords(heardOnly, antennas)).toBe(
      'Heard on North-east wire only: 160 times; on Vertical only: 92 times. By station and night, North-east wire was 1.9 times as often the only one (95\u2009% interval 1.1 to 3.2).',
    );
    const turned = { ...heardOnly, oddsRatio: 0.5, oddsRatioInterval: [0.25, 0.8] as [number, number] };
    expect(heardOnlyWords(turned, antennas)).toContain(
      'Vertical was 2.0 times as often the only one (95\u2009% interval 1.3 to 4.0)',
    );
  });

  it('stay finite when one side never was alone', () => {
    const never = { ...heardOnly, oddsRatio: 0, oddsRatioInterval: [0, 0.4] as [number, number] };
    expect(heardOnlyWords(never, antennas)).toContain(
      'Vertical was always the only one (95\u2009% interval 2.5 to no limit)',
    );
    const none = { ...heardOnly, onA: 0, onB: 0, oddsRatio: null, oddsRatioInterval: null };
    expect(heardOnlyWords(none, antennas)).toBe('Nothing was heard on one antenna only.');
  });

  it('never write a p value as zero', () => {
    expect(pText(1e-9)).toBe('below 0.001');
    expect(pText(0.0456)).toBe('0.046');
    expect(pText(null)).toBe('not known');
  });

  it('count the stations that carry half of the weight', () => {
    expect(halfWeightWords(fixtureAnswer())).toBe('14 of 96 stations carry half of all units.');
  });
});
