import { describe, expect, it } from 'vitest';
import type { Dwell } from '../../../shared/contracts/dwell.ts';
import { additionOf, draftOf, editOf, errorsByField, splitOf } from './dwell-draft.ts';
import { previewLines } from './preview-words.ts';
import { parseUtc, utcText } from './utc-text.ts';

const dwell: Dwell = {
  ...{ id: 7, receiverId: 1, antennaId: 2, source: 'token', note: '' },
  startsAt: '2026-11-30T18:05:09.250Z',
  endsAt: '2026-11-30T18:35:00Z',
};

describe('a time that is typed', () => {
  const near = Date.parse('2026-11-30T23:50:00Z');
  it('is read with and without seconds, T, Z and UTC', () => {
    const wanted = Date.parse('2026-11-30T18:05:00Z');
    for (const text of ['2026-11-30 18:05:00', '2026-11-30T18:05Z', ' 2026-11-30 18:05 UTC ']) {
      expect(parseUtc(text, near)).toBe(wanted);
    }
  });

  it('takes a clock time on the nearest day', () => {
    expect(utcText(parseUtc('23:40', near)!)).toBe('2026-11-30 23:40:00');
    expect(utcText(parseUtc('0:10', near)!)).toBe('2026-12-01 00:10:00');
  });

  it('takes a clock time on the last day that is not ahead, when it may not be', () => {
    const midnight = Date.parse('2026-12-01T00:10:00Z');
    expect(utcText(parseUtc('23:55', midnight, midnight)!)).toBe('2026-11-30 23:55:00');
    expect(utcText(parseUtc('00:05', midnight, midnight)!)).toBe('2026-12-01 00:05:00');
  });

  it('is refused where the calendar or the clock has no such time', () => {
    for (const text of ['2026-02-30 10:00', '2026-11-30 24:10', '25:00', '12:60', 'noon', '']) {
      expect(parseUtc(text, near)).toBeNull();
    }
  });
});

describe('a correction as it is typed', () => {
  it('names only what differs and keeps milliseconds that the field does not show', () => {
    expect(editOf(dwell, { ...draftOf(dwell), antennaId: 3 })).toEqual({
      change: { action: 'edit', dwellId: 7, antennaId: 3 },
    });
    expect(editOf(dwell, { ...draftOf(dwell), endsText: '18:40' })).toEqual({
      change: { action: 'edit', dwellId: 7, endsAt: '2026-11-30T18:40:00.000Z' },
    });
  });

  it('opens a dwell again', () => {
    expect(editOf(dwell, { ...draftOf(dwell), stillOn: true })).toEqual({
      change: { action: 'edit', dwellId: 7, endsAt: null },
    });
  });

  it('says when nothing differs, when a time is unreadable and when the end comes first', () => {
    expect(editOf(dwell, draftOf(dwell))).toMatchObject({
      errors: { antennaId: expect.stringMatching(/^Nothing is changed/) },
    });
    expect(editOf(dwell, { ...draftOf(dwell), startsText: 'six' })).toEqual({
      errors: { startsAt: 'Give a UTC time such as 2026-11-30 18:05:00.' },
    });
    expect(editOf(dwell, { ...draftOf(dwell), endsText: '18:00' })).toEqual({
      errors: { endsAt: 'The end must come after the start.' },
    });
  });

  it('adds and splits', () => {
    const draft = { ...draftOf(dwell), startsText: '19:00', endsText: '19:30', note: ' rain ' };
    expect(additionOf(4, draft, Date.parse(dwell.startsAt))).toEqual({
      change: {
        action: 'add',
        dwell: {
          ...{ receiverId: 4, antennaId: 2, note: 'rain' },
          startsAt: '2026-11-30T19:00:00.000Z',
          endsAt: '2026-11-30T19:30:00.000Z',
        },
      },
    });
    expect(splitOf(dwell, '18:20', 5)).toEqual({
      change: { action: 'split', dwellId: 7, at: '2026-11-30T18:20:00.000Z', antennaId: 5 },
    });
  });

  it("puts the server's sentences beside the field that they speak of", () => {
    const edit = { action: 'edit', dwellId: 7, endsAt: '2026-11-30T19:40:00Z' } as const;
    const overlap = [{ path: 'body.changes.0', message: 'Two antennas at once cannot be.' }];
    expect(errorsByField(overlap, edit)).toEqual({ endsAt: 'Two antennas at once cannot be.' });
    expect(errorsByField(overlap, { ...edit, startsAt: '2026-11-30T17:00:00Z' })).toEqual({
      startsAt: 'Two antennas at once cannot be.',
    });
    const field = [{ path: 'body.changes.0.dwell.endsAt', message: 'The end must come after the start.' }];
    expect(errorsByField(field, edit)).toEqual({ endsAt: 'The end must come after the start.' });
  });
});

describe('a preview in words', () => {
  const none = {
    ...{ spotsChangingAntenna: 0, spotsGainingAntenna: 0, spotsLosingAntenna: 0, spotsChangingGuard: 0 },
    ...{ blocksTouched: 0, nightsTouched: [], warnings: [] },
  };
  it('tells moved, gained and lost spots apart', () => {
    expect(
      previewLines({
        ...none,
        ...{
          spotsChangingAntenna: 416,
          spotsGainingAntenna: 3,
          spotsLosingAntenna: 1,
          spotsChangingGuard: 20,
        },
        ...{ blocksTouched: 2, nightsTouched: ['2026-11-30'] },
      }),
    ).toEqual([
      '412 spots change antenna',
      '3 spots that had none gain an antenna',
      '1 spot loses its antenna',
      '20 spots move into or out of a guard',
      '2 blocks touched',
      '1 night made anew: 2026-11-30',
    ]);
  });

  it('says that no spot changes, and shortens a long list of nights', () => {
    expect(previewLines(none)).toEqual(['No spot changes antenna or guard']);
    const nights = ['2026-11-01', '2026-11-02', '2026-11-03', '2026-11-04'];
    expect(previewLines({ ...none, nightsTouched: nights }).at(-1)).toBe(
      '4 nights made anew, from 2026-11-01 to 2026-11-04',
    );
  });
});
