import { describe, expect, it } from 'vitest';
import { printedFinding } from '../../../server/features/findings/pdf/printed-finding.fixture.ts';
import { finding } from '../../../shared/contracts/finding.ts';
import type { FindingSummary } from '../../../shared/contracts/finding.ts';
import { fixtureAnswer } from '../../../shared/pictures/answer.fixture.ts';
import { antennasOf, commonLimitDb, fits, readFilter } from './finding-filter.ts';
import {
  decisionText,
  dueState,
  fileStemOf,
  frozenNames,
  inGroups,
  nightsWords,
  verdictWords,
} from './finding-words.ts';
import { shareState } from './share-state.ts';

const frozen = (overrides: Partial<FindingSummary> = {}): FindingSummary => ({
  ...finding.parse(printedFinding(fixtureAnswer())),
  ...overrides,
});
const decided = (decision: 'keep' | 'look again', lookAgainOn: string | null = null) => ({
  id: 7,
  decision,
  antennaName: null,
  lookAgainOn,
  reason: 'It pays for its mast.',
  decidedBy: 'Aoife Analyst',
  decidedAt: '2026-11-16T09:30:00.000Z',
});

describe('a decision in words', () => {
  it('names the antenna that it is about and the day on which to look again', () => {
    expect(decisionText({ decision: 'take down', antennaName: 'Vertical', lookAgainOn: null })).toBe(
      'Take down Vertical',
    );
    expect(decisionText({ decision: 'keep', antennaName: null, lookAgainOn: null })).toBe('Keep');
    expect(decisionText({ decision: 'look again', antennaName: null, lookAgainOn: '2027-03-01' })).toBe(
      'Look again on 2027-03-01',
    );
    expect(decisionText({ decision: 'look again', antennaName: 'Vertical', lookAgainOn: '2027-03-01' })).toBe(
      'Look again at Vertical on 2027-03-01',
    );
  });

  it('is due on its day and overdue from the next', () => {
    const on = { lookAgainOn: '2027-03-01' };
    expect(['2027-02-28', '2027-03-01', '2027-03-02'].map((today) => dueState(on, today))).toEqual([
      null,
      'today',
      'overdue',
    ]);
    expect([dueState(null, '2027-03-02'), dueState({ lookAgainOn: null }, '2027-03-02')]).toEqual([
      null,
      null,
    ]);
  });
});

it('a verdict is said with the names of the antennas', () => {
  const { antennas } = frozen();
  expect(verdictWords('a clearly better', antennas)).toBe('North-east wire clearly better');
  expect(verdictWords('b better', antennas)).toBe('Vertical better');
  expect(verdictWords('no practical difference', antennas)).toBe('No practical difference');
});

it('one night is not written as a range', () => {
  expect(nightsWords({ firstNight: '2026-11-01', lastNight: '2026-11-14' })).toBe('2026-11-01 to 2026-11-14');
  expect(nightsWords({ firstNight: '2026-11-01', lastNight: '2026-11-01' })).toBe('2026-11-01');
});

it('a finding speaks of its antennas and receivers by the names of its day', () => {
  const names = frozenNames(finding.parse(printedFinding()));
  expect([names.antenna(2), names.antenna(9), names.receiver(1), names.receiver(8)]).toEqual([
    'Vertical',
    'antenna 9',
    'Shed',
    'receiver 8',
  ]);
});

it('a digest is cut in eights without losing a figure', () => {
  const digest = '0123456789abcdef'.repeat(4);
  expect(inGroups(digest)).toHaveLength(8);
  expect(inGroups(digest).join('')).toBe(digest);
});

it('a title makes a file name that no file system minds', () => {
  expect(fileStemOf('Is it worth it? / A:B')).toBe('is-it-worth-it-a-b');
  expect(fileStemOf('???')).toBe('finding');
});

describe('the filter of findings', () => {
  it('is read from an address, and what means nothing there filters nothing', () => {
    expect(readFilter({ antenna: '3', decision: 'look again' })).toEqual({
      antennaId: 3,
      decision: 'look again',
    });
    expect(readFilter({ antenna: 'x', decision: 'burn' })).toEqual({ antennaId: null, decision: null });
    expect(readFilter({ antenna: ['3', '4'] })).toEqual({ antennaId: null, decision: null });
  });

  it('finds by either antenna', () => {
    const about = (antennaId: number) => fits(frozen(), { antennaId, decision: null }, '2026-12-01');
    expect([about(1), about(2), about(3)]).toEqual([true, true, false]);
  });

  it('finds by the decision that counts, by none, and by a date that has come', () => {
    const kinds = ['keep', 'look again', 'none', 'due', 'rebuild'] as const;
    const found = (latestDecision: FindingSummary['latestDecision']) =>
      kinds.filter((decision) =>
        fits(frozen({ latestDecision }), { antennaId: null, decision }, '2027-03-01'),
      );
    expect(found(null)).toEqual(['none']);
    expect(found(decided('keep'))).toEqual(['keep']);
    expect(found(decided('look again', '2027-03-02'))).toEqual(['look again']);
    expect(found(decided('look again', '2027-03-01'))).toEqual(['look again', 'due']);
  });

  it('offers each antenna once, by its latest name, in the order of the alphabet', () => {
    const { antennas } = frozen();
    const renamed = { ...antennas, a: { ...antennas.a, name: 'Wire 55' } };
    expect(antennasOf([frozen({ antennas: renamed }), frozen()])).toEqual([
      { id: 2, name: 'Vertical' },
      { id: 1, name: 'Wire 55' },
    ]);
  });
});

it('several estimates share an axis that holds each interval, up to a limit', () => {
  const estimate = frozen().estimate!;
  const reaching = (low: number, high: number) =>
    frozen({ estimate: { ...estimate, interval95Db: [low, high] }, marginDb: 1 });
  expect(commonLimitDb([])).toBe(3);
  expect(commonLimitDb([reaching(1.1, 2.5), reaching(-4.2, 0.5)])).toBe(5);
  expect(commonLimitDb([reaching(1, 90)])).toBe(20);
});

it('a link is good until it ends or is withdrawn', () => {
  const nowMs = Date.parse('2026-12-01T12:00:00Z');
  const ends = (expiresAt: string, withdrawnAt: string | null = null) =>
    shareState({ expiresAt, withdrawnAt }, nowMs);
  expect(ends('2026-12-03T12:00:00Z')).toEqual({ isGood: true, words: 'good, ends in 2\u2009d' });
  expect(ends('2026-12-01T12:00:00Z').isGood).toBe(false);
  expect(ends('2026-12-03T12:00:00Z', '2026-12-01T11:50:00Z')).toEqual({
    isGood: false,
    words: 'withdrawn 10\u2009min ago',
  });
});
