import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { comparisonQuestion } from './comparison.ts';
import {
  completeQuestion,
  decodeQuestion,
  encodeQuestion,
  openQuestion,
  questionKeys,
  sameQuestion,
} from './comparison-url.ts';
import type { QuestionDraft } from './comparison-url.ts';

const antenna = fc.integer({ min: 1, max: 2_147_483_647 });
const night = fc
  .date({ min: new Date('1990-01-01'), max: new Date('2090-01-01'), noInvalidDate: true })
  .map((date) => date.toISOString().slice(0, 10));
const mark = fc.record({
  reference: fc.constantFrom('utc' as const, 'sunset' as const, 'sunrise' as const),
  // -0 is written "0" in an address and asks the same.
  hours: fc.double({ min: -12, max: 24, noNaN: true }).map((hours) => hours + 0 || 0),
});
const question: fc.Arbitrary<QuestionDraft> = fc
  .record({
    antennaA: antenna,
    antennaB: antenna,
    nights: fc.tuple(fc.option(night), fc.option(night)),
    bandsMetres: fc.uniqueArray(fc.integer({ min: 1, max: 3000 }), { maxLength: 20 }),
    hours: fc.option(fc.record({ from: mark, to: mark })),
    sectors: fc.uniqueArray(fc.integer({ min: 0, max: 35 }), { maxLength: 36 }),
    receivers: fc.uniqueArray(antenna, { maxLength: 50 }),
    kinds: fc.uniqueArray(fc.constantFrom('simultaneous' as const, 'alternating' as const)),
    rules: fc.option(
      fc.record({
        blockMinutes: fc.constantFrom(
          5 as const,
          10 as const,
          15 as const,
          20 as const,
          30 as const,
          60 as const,
        ),
        windowSeconds: fc.integer({ min: 1, max: 300 }),
        freqToleranceKhz: fc.double({ min: 0, max: 5, noNaN: true }),
        guardSeconds: fc.integer({ min: 0, max: 600 }),
      }),
    ),
    marginDb: fc.option(fc.double({ min: 0.1, max: 20, noNaN: true })),
    zeros: fc.constantFrom('pratt' as const, 'drop' as const),
    clustering: fc.constantFrom('one-way' as const, 'two-way' as const),
    hourBasis: fc.constantFrom('utc' as const, 'sunset' as const, 'sunrise' as const),
  })
  .filter((q) => q.antennaA !== q.antennaB)
  .map(({ nights: [one, other], ...rest }) => {
    const [fromNight, toNight] = one !== null && other !== null && one > other ? [other, one] : [one, other];
    return { ...rest, fromNight, toNight };
  });

describe('the address of a question', () => {
  it('comes back as the same question, whatever was asked', () => {
    fc.assert(
      fc.property(question, (asked) => {
        const { draft, problems } = decodeQuestion(encodeQuestion(asked));
        expect(problems).toEqual([]);
        expect(draft).toEqual(asked);
      }),
      { numRuns: 500 },
    );
  });

  it('survives being written into a real address and read back', () => {
    fc.assert(
      fc.property(question, (asked) => {
        const url = new URL('http://127.0.0.1/compare');
        url.search = new URLSearchParams(encodeQuestion(asked)).toString();
        expect(decodeQuestion(Object.fromEntries(url.searchParams)).draft).toEqual(asked);
      }),
    );
  });

  it('stays readable: a question of the brief reads as one', () => {
    expect(
      encodeQuestion({
        ...openQuestion,
        antennaA: 3,
        antennaB: 7,
        bandsMetres: [160],
        sectors: [0, 1],
        hours: { from: { reference: 'sunset', hours: 2 }, to: { reference: 'sunrise', hours: -0.5 } },
        fromNight: '2026-11-01',
        toNight: '2026-11-30',
        rules: { blockMinutes: 15, windowSeconds: 30, freqToleranceKhz: 0.3, guardSeconds: 20 },
      }),
    ).toEqual({
      a: '3',
      b: '7',
      bands: '160',
      sectors: '0,1',
      hours: 'sunset2..sunrise-0.5',
      nights: '2026-11-01..2026-11-30',
      rules: '15,30,0.3,20',
    });
  });

  it('leaves out everything that is at its default', () => {
    expect(encodeQuestion(openQuestion)).toEqual({});
    expect(decodeQuestion({})).toEqual({ draft: openQuestion, problems: [] });
  });

  it('accepts one open end of the nights', () => {
    expect(decodeQuestion({ nights: '2026-11-01..' }).draft).toMatchObject({
      fromNight: '2026-11-01',
      toNight: null,
    });
    expect(decodeQuestion({ nights: '..2026-11-30' }).draft).toMatchObject({
      fromNight: null,
      toNight: '2026-11-30',
    });
  });
});

describe('junk in an address', () => {
  const texts = fc.oneof(
    fc.string(),
    fc.constantFrom('1,1', '..', 'utc', 'sunset99..utc1', '1e999', '-3', ','),
  );

  it('never breaks the page and always leaves a question that the contract accepts', () => {
    const value = fc.oneof(texts, fc.constant(null), fc.array(fc.option(texts), { maxLength: 3 }));
    const query = fc.dictionary(fc.oneof(fc.constantFrom(...questionKeys), fc.string()), value);
    fc.assert(
      fc.property(query, (junk) => {
        const { draft } = decodeQuestion(junk);
        const whole = { ...draft, antennaA: draft.antennaA ?? 1, antennaB: draft.antennaB ?? 2_000_000_000 };
        const checked = comparisonQuestion.safeParse(whole);
        expect(checked.error?.issues ?? []).toEqual([]);
      }),
      { numRuns: 1000 },
    );
  });

  it.each([
    ['bands', '16x', { bandsMetres: [] }, /bands=16x.*metres such as 160,80.*All bands/],
    ['bands', '-160', { bandsMetres: [] }, /bands=-160/],
    ['sectors', '0,36', { sectors: [] }, /sectors=0,36.*All directions/],
    ['hours', 'sunset2', { hours: null }, /hours=sunset2.*sunset2\.\.sunrise0.*All hours/],
    ['hours', 'moonrise1..utc3', { hours: null }, /moonrise1/],
    ['hours', 'utc22..utc25', { hours: null }, /utc25/],
    ['nights', '2026-02-30..', { fromNight: null }, /2026-02-30.*All nights/],
    ['nights', '2026-11-30..2026-11-01', { fromNight: null, toNight: null }, /the earlier first/],
    ['receivers', '1,,2', { receivers: [] }, /All receivers/],
    ['kinds', 'both', { kinds: [] }, /simultaneous, alternating or both/],
    ['rules', '15,30,0.3', { rules: null }, /rules=15,30,0\.3.*own rules/],
    ['rules', '7,30,0.3,20', { rules: null }, /rules=7/],
    ['margin', '99', { marginDb: null }, /0\.1 to 20/],
    ['zeros', 'split', { zeros: 'drop' }, /pratt or drop/],
    ['basis', 'noon', { hourBasis: 'utc' }, /utc, sunset or sunrise/],
    ['a', 'north', { antennaA: null }, /a=north.*Choose an antenna/],
  ])('falls back and says so for %s=%s', (key, text, expected, sentence) => {
    const { draft, problems } = decodeQuestion({ [key]: text });
    expect(draft).toMatchObject(expected);
    expect(problems).toHaveLength(1);
    expect(problems[0]).toMatch(sentence);
  });

  it('names unknown keys unless the page says that they are its own', () => {
    expect(decodeQuestion({ colour: 'red', trial: '4' }, ['trial']).problems).toEqual([
      'The address says "colour", which means nothing here; it was left out.',
    ]);
  });

  it('takes the first of a part that is given twice, and says so', () => {
    const { draft, problems } = decodeQuestion({ bands: ['80', '160'] });
    expect(draft.bandsMetres).toEqual([80]);
    expect(problems).toEqual(['The address gives "bands" more than once; the first one counts.']);
  });

  it('refuses to compare an antenna with itself', () => {
    const { draft, problems } = decodeQuestion({ a: '4', b: '4' });
    expect(draft).toMatchObject({ antennaA: 4, antennaB: null });
    expect(problems).toHaveLength(1);
    expect(completeQuestion(draft)).toBeNull();
  });

  it('counts a list with repeats once', () => {
    expect(decodeQuestion({ sectors: '3,3,1' }).draft.sectors).toEqual([3, 1]);
  });
});

describe('comparing two questions', () => {
  it('finds them the same only when every part is', () => {
    const asked = { ...openQuestion, antennaA: 1, antennaB: 2 };
    expect(sameQuestion(asked, { ...asked })).toBe(true);
    expect(sameQuestion(asked, { ...asked, marginDb: 2 })).toBe(false);
    expect(completeQuestion(asked)).toEqual(asked);
  });
});
