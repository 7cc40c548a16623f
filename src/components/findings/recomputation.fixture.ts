import type { Recomputation } from '../../../shared/contracts/finding.ts';
import { fixtureAnswer } from '../../../shared/pictures/answer.fixture.ts';

const { verdict, estimate, counts } = fixtureAnswer();
const numbers = { verdict, estimate, counts };

/** An invented finding asked again: nothing changed unless said. */
export function fixtureRecomputation(overrides: Partial<Recomputation> = {}): Recomputation {
  return {
    same: true,
    sentence: 'Same data, same numbers.',
    checkedAt: '2027-11-15T13:05:00Z',
    units: { same: true, digestThen: 'ab'.repeat(32), digestNow: 'ab'.repeat(32) },
    program: { same: true, versionThen: '0.1.0', versionNow: '0.1.0', sameNumbers: true },
    ...{ then: numbers, now: numbers, frozenUnitsNow: numbers },
    ...{ changes: [], nights: [], dwells: [], truncated: false },
    ...overrides,
  };
}

/** The same after one dwell was cut short and the program was renewed. */
export function changedRecomputation(): Recomputation {
  const at = { receiver: 'Shed', antenna: 'Vertical', startsAt: '2026-11-03T18:00:00Z' };
  return fixtureRecomputation({
    same: false,
    sentence: 'Other data: the units of the night of 2026-11-03 are not as they were.',
    units: { same: false, digestThen: 'ab'.repeat(32), digestNow: 'cd'.repeat(32) },
    program: { same: false, versionThen: '0.1.0', versionNow: '0.2.0', sameNumbers: false },
    now: { verdict, counts: { ...counts, units: 409 }, estimate: { ...estimate!, estimateDb: 1.91 } },
    frozenUnitsNow: { verdict, counts, estimate: { ...estimate!, estimateDb: 1.85 } },
    changes: [{ about: 'dwells', sentence: 'Ann cut the dwell of Shed on Vertical short.' }],
    nights: [
      {
        ...{ night: '2026-11-03', unitsThen: 30, unitsNow: 27, added: 0, removed: 3, changed: 0 },
        ...{ heardOnlyThen: 4, heardOnlyNow: 4 },
      },
    ],
    dwells: [
      {
        change: 'changed',
        before: { ...at, endsAt: '2026-11-03T18:15:00Z' },
        after: { ...at, endsAt: '2026-11-03T18:10:00Z' },
        by: 'Ann',
        at: '2027-11-01T12:00:00Z',
        sentence: 'Shed on Vertical from 2026-11-03 18:00:00Z ends at 18:10:00Z instead of 18:15:00Z.',
      },
    ],
  });
}
