import { describe, expect, it } from 'vitest';
import {
  bandsText,
  dateText,
  hoursText,
  questionPhrases,
  questionSentence,
  questionTerms,
  sectorsText,
} from './comparison-sentence.ts';
import type { QuestionNames } from './comparison-sentence.ts';
import { openQuestion } from './comparison-url.ts';

const names: QuestionNames = {
  antenna: (antennaId) => ['', 'North-east wire', 'Vertical'][antennaId] ?? `antenna ${antennaId}`,
  receiver: (receiverId) => `Receiver ${receiverId}`,
  sectorCount: 12,
};
const asked = { ...openQuestion, antennaA: 1, antennaB: 2 };

describe('the question as a sentence', () => {
  it('says what an analyst would say', () => {
    const sentence = questionSentence(
      {
        ...asked,
        bandsMetres: [160],
        sectors: [0, 1],
        hours: { from: { reference: 'sunset', hours: 2 }, to: { reference: 'sunrise', hours: 0 } },
        fromNight: '2026-11-01',
        toNight: '2026-11-30',
      },
      names,
    );
    expect(sentence).toBe(
      'Does North-east wire hear better than Vertical on 160\u2009m toward 0-60 degrees ' +
        'from 2\u2009h after sunset to sunrise between 1 and 30 November 2026?',
    );
  });

  it('stays a sentence when everything is left open', () => {
    expect(questionSentence(asked, names)).toBe(
      'Does North-east wire hear better than Vertical on every band toward every direction at any hour over all nights?',
    );
  });

  it('asks for the antenna that is missing', () => {
    expect(questionPhrases({ ...asked, antennaB: null }, names)[1]).toEqual({
      blank: 'antennaB',
      lead: 'hear better than',
      text: 'which antenna',
    });
  });
});

describe('the words of each blank', () => {
  it.each([
    [[160], '160\u2009m'],
    [[160, 80], '160 and 80\u2009m'],
    [[160, 80, 40], '160, 80 and 40\u2009m'],
  ])('lists the bands %j as %s', (bands, text) => {
    expect(bandsText(bands)).toBe(text);
  });

  it.each([
    [[3], '90-120 degrees'],
    [[1, 0], '0-60 degrees'],
    [[11, 0, 1], '330-60 degrees'],
    [[11], '330-360 degrees'],
    [[0, 6], '0-30 and 180-210 degrees'],
    [[11, 0, 5, 6, 9], '150-210, 270-300 and 330-30 degrees'],
    [Array.from({ length: 12 }, (_, sector) => sector), '0-360 degrees'],
    [[20], 'no direction that the station has'],
  ])('joins the sectors %j to %s', (sectors, text) => {
    expect(sectorsText(sectors, 12)).toBe(text);
  });

  it('writes half degrees where sectors are that wide', () => {
    expect(sectorsText([1], 16)).toBe('22.5-45 degrees');
  });

  it.each([
    ['utc', 22, 'utc', 4, '22:00 to 04:00 UTC'],
    ['utc', -1.5, 'utc', 24, '22:30 to 00:00 UTC'],
    ['sunset', -1, 'sunset', 1.5, '1\u2009h before sunset to 1\u2009h 30\u2009min after sunset'],
    ['sunset', 0, 'sunrise', -0.25, 'sunset to 15\u2009min before sunrise'],
    ['utc', 20, 'sunrise', 0, '20:00 UTC to sunrise'],
  ] as const)(
    'says the hours from %s %d to %s %d',
    (fromReference, fromHours, toReference, toHours, text) => {
      const from = { reference: fromReference, hours: fromHours };
      expect(hoursText({ from, to: { reference: toReference, hours: toHours } })).toBe(text);
    },
  );

  it.each([
    ['2026-11-01', '2026-11-30', 'between 1 and 30 November 2026'],
    ['2026-10-28', '2026-11-03', 'between 28 October and 3 November 2026'],
    ['2025-12-30', '2026-01-02', 'between 30 December 2025 and 2 January 2026'],
    ['2026-11-03', '2026-11-03', 'in the night of 3 November 2026'],
    ['2026-11-03', null, 'since 3 November 2026'],
    [null, '2026-11-03', 'up to 3 November 2026'],
  ])('says the nights from %s to %s', (fromNight, toNight, words) => {
    const phrase = questionPhrases({ ...asked, fromNight, toNight }, names)[5]!;
    expect(`${phrase.lead} ${phrase.text}`).toBe(words);
  });

  it('writes a date as people say it', () => {
    expect(dateText('2026-02-09')).toBe('9 February 2026');
  });
});

describe('the second line of the question', () => {
  const standing = {
    rules: { blockMinutes: 15 as const, windowSeconds: 30, freqToleranceKhz: 0.3, guardSeconds: 20 },
    marginDb: 1,
  };

  it('names the values of the station where the question leaves them open', () => {
    expect(questionTerms(asked, names, standing).map(({ term, text }) => `${term}: ${text}`)).toEqual([
      'Receivers: all',
      'Kinds of unit: simultaneous and alternating',
      'Rules: blocks of 15\u2009min, window 30\u2009s, tolerance 0.3\u2009kHz, guard 20\u2009s, the rules of the station',
      'Margin: 1\u2009dB',
      'Zeros: dropped before ranking',
      'Independent: station-nights',
    ]);
  });

  it('names what the question asks for', () => {
    const terms = questionTerms(
      {
        ...asked,
        receivers: [2, 3],
        kinds: ['alternating'],
        rules: { ...standing.rules, blockMinutes: 30 },
        marginDb: 2.5,
        zeros: 'drop',
      },
      names,
      standing,
    );
    expect(terms.map(({ text }) => text)).toEqual([
      'Receiver 2, Receiver 3',
      'alternating only',
      'blocks of 30\u2009min, window 30\u2009s, tolerance 0.3\u2009kHz, guard 20\u2009s',
      '2.5\u2009dB',
      'dropped before ranking',
      'station-nights',
    ]);
  });
});
