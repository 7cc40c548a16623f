import { questionSentence } from '../../../../shared/contracts/comparison-sentence.ts';
import type { ComparisonAnswer } from '../../../../shared/contracts/comparison.ts';
import { fixtureAnswer } from '../../../../shared/pictures/answer.fixture.ts';
import type { PrintedFinding } from './facts.ts';

/** An invented finding around an invented answer, for tests of the printed page. */
export function printedFinding(
  answer: ComparisonAnswer = fixtureAnswer(),
  overrides: Partial<PrintedFinding> = {},
): PrintedFinding {
  const { antennas, verdict, estimate, counts, marginDb, rules } = answer;
  return {
    id: 1,
    title: 'Is the north-east wire worth its mast',
    note: 'Before the first frost.',
    sentence: questionSentence(answer.question, {
      antenna: (id) => (id === antennas.a.id ? antennas.a.name : antennas.b.name),
      receiver: String,
      sectorCount: answer.sectorCount,
    }),
    ...{ antennas, verdict, estimate, counts, marginDb, answer },
    firstNight: '2026-11-01',
    lastNight: '2026-11-14',
    trial: null,
    frozenBy: 'Aoife Analyst',
    frozenAt: '2026-11-15T13:05:00.000Z',
    latestDecision: null,
    question: { ...answer.question, fromNight: '2026-11-01', toNight: '2026-11-14', rules, marginDb },
    leftOutNight: '2026-11-15',
    station: {
      name: 'Corrib Low Band Group',
      callSign: 'EI7QSB',
      locator: 'IO53',
      latitudeDeg: 53.5,
      longitudeDeg: -9,
    },
    receivers: [
      { id: 1, callSign: 'EI7QSA', label: 'Shed' },
      { id: 2, callSign: 'EI7QSC', label: 'Attic' },
    ],
    digest: '3f2a91c07b5e4d18'.repeat(4),
    nightDigests: [],
    dwells: 412,
    programVersion: '0.1.0 (build 3f2a91c07b5e)',
    decisions: [
      {
        id: 1,
        decision: 'look again',
        antennaName: 'Vertical',
        lookAgainOn: '2027-02-01',
        reason: 'Its radials lie in water.',
        decidedBy: 'M\u00e1ire Manager',
        decidedAt: '2026-11-16T09:30:00.000Z',
      },
    ],
    ...overrides,
  };
}
