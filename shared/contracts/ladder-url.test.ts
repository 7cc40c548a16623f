import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { completeQuestion } from './comparison-url.ts';
import { ladderQuestion } from './ladder.ts';
import type { LadderQuestion } from './ladder.ts';
import {
  decodeLadder,
  encodeLadder,
  ladderKeys,
  openLadder,
  pairQuestion,
  sameLadder,
} from './ladder-url.ts';
import type { LadderAddress } from './ladder-url.ts';

const antenna = fc.integer({ min: 1, max: 2_147_483_647 });
const night = fc
  .date({ min: new Date('1990-01-01'), max: new Date('2090-01-01'), noInvalidDate: true })
  .map((date) => date.toISOString().slice(0, 10));
const mark = fc.record({
  reference: fc.constantFrom('utc' as const, 'sunset' as const, 'sunrise' as const),
  // -0 is written "0" in an address and asks the same.
  hours: fc.double({ min: -12, max: 24, noNaN: true }).map((hours) => hours + 0 || 0),
});
const question: fc.Arbitrary<LadderQuestion> = fc
  .record({
    bandMetres: fc.option(fc.integer({ min: 1, max: 3000 })),
    nights: fc.tuple(fc.option(night), fc.option(night)),
    sectors: fc.uniqueArray(fc.integer({ min: 0, max: 35 }), { maxLength: 36 }),
    hours: fc.option(fc.record({ from: mark, to: mark })),
    kinds: fc.uniqueArray(fc.constantFrom('simultaneous' as const, 'alternating' as const)),
    receivers: fc.uniqueArray(antenna, { maxLength: 50 }),
    rules: fc.option(
      fc.record({
        blockMinutes: fc.constantFrom(5 as const, 15 as const, 60 as const),
        windowSeconds: fc.integer({ min: 1, max: 300 }),
        freqToleranceKhz: fc.double({ min: 0, max: 5, noNaN: true }),
        guardSeconds: fc.integer({ min: 0, max: 600 }),
      }),
    ),
    referenceAntennaId: fc.option(antenna),
    marginDb: fc.option(fc.double({ min: 0.1, max: 20, noNaN: true })),
  })
  .map(({ nights: [one, other], ...rest }) => {
    const [fromNight, toNight] = one !== null && other !== null && one > other ? [other, one] : [one, other];
    return { ...rest, fromNight, toNight };
  });
const address: fc.Arbitrary<LadderAddress> = fc.record({
  question,
  pair: fc.option(
    fc.tuple(antenna, antenna).filter(([a, b]) => a !== b) as fc.Arbitrary<readonly [number, number]>,
  ),
});

describe('the address of a ladder', () => {
  it('comes back as the same ladder through a real address, whatever was asked', () => {
    fc.assert(
      fc.property(address, (asked) => {
        const url = new URL('http://127.0.0.1/ladder');
        url.search = new URLSearchParams(encodeLadder(asked)).toString();
        expect(decodeLadder(Object.fromEntries(url.searchParams))).toEqual({ ...asked, problems: [] });
      }),
      { numRuns: 500 },
    );
  });

  it('reads as the question and leaves out what is at its default', () => {
    expect(encodeLadder({ question: openLadder, pair: null })).toEqual({});
    expect(
      encodeLadder({
        question: {
          ...openLadder,
          bandMetres: 160,
          sectors: [0, 1],
          hours: { from: { reference: 'sunset', hours: 0 }, to: { reference: 'sunrise', hours: 0 } },
          fromNight: '2026-11-01',
          referenceAntennaId: 4,
          marginDb: 1.5,
        },
        pair: [3, 7],
      }),
    ).toEqual({
      band: '160',
      sectors: '0,1',
      hours: 'sunset0..sunrise0',
      nights: '2026-11-01..',
      margin: '1.5',
      reference: '4',
      pair: '3,7',
    });
  });

  it('falls back part by part with one sentence each, and never throws on what people type', () => {
    const {
      question: read,
      pair,
      problems,
    } = decodeLadder(
      {
        band: '160,80',
        sectors: '99',
        reference: 'loop',
        pair: '3,3',
        bands: '40',
        margin: '2',
        wall: '',
      },
      ['wall'],
    );
    expect(read).toEqual({ ...openLadder, marginDb: 2 });
    expect(pair).toBeNull();
    expect(problems).toEqual([
      'The address says "bands", which means nothing here; it was left out.',
      'The address says sectors=99, which cannot be read: give sector numbers from 0 such as 0,1. All directions are shown.',
      'The address says band=160,80, which cannot be read: give one wavelength in metres such as 160. The band with the most units is shown.',
      "The address says reference=loop, which cannot be read: give an antenna's number. Values are against the mean.",
      "The address says pair=3,3, which cannot be read: give two antennas' numbers such as 3,7. No pair is chosen.",
    ]);
  });

  it('gives a question that the server accepts, whatever stands in it', () => {
    const part = fc.oneof(fc.string(), fc.array(fc.string(), { maxLength: 3 }), fc.constant(null));
    fc.assert(
      fc.property(fc.dictionary(fc.constantFrom(...ladderKeys), part), (query) => {
        expect(ladderQuestion.safeParse(decodeLadder(query).question).success).toBe(true);
      }),
      { numRuns: 500 },
    );
  });

  it('tells two questions apart by what they ask', () => {
    expect(sameLadder(openLadder, { ...openLadder })).toBe(true);
    expect(sameLadder(openLadder, { ...openLadder, referenceAntennaId: 3 })).toBe(false);
  });
});

describe('two rungs of a ladder', () => {
  it('become a complete question about the same band, directions, hours and nights', () => {
    fc.assert(
      fc.property(question, (asked) => {
        const pair = completeQuestion(pairQuestion(asked, 160, [3, 7]));
        expect(pair).toMatchObject({
          ...{ antennaA: 3, antennaB: 7, bandsMetres: [160] },
          ...{ sectors: asked.sectors, hours: asked.hours, rules: asked.rules },
          ...{ fromNight: asked.fromNight, toNight: asked.toNight },
        });
      }),
    );
  });
});
