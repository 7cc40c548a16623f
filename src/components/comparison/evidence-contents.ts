import type { ComparisonAnswer } from '../../../shared/contracts/comparison.ts';
import { countOf, formatDbInterval } from '../../../shared/format.ts';

export interface EvidencePart {
  /** Also the anchor in the address. */
  id: 'where-and-when' | 'fair' | 'stop' | 'choices' | 'stations';
  title: string;
  /** What the part says, in a few words: often enough to leave it closed. */
  says: string;
}

/** The parts of the evidence in reading order, each with its shortest answer. */
export function evidenceParts(answer: ComparisonAnswer): EvidencePart[] {
  const { fairness, counts } = answer;
  const cells = [...answer.sectors, ...answer.bandHours.cells];
  const speaking = cells.filter(({ speaks }) => speaks).length;
  return [
    {
      id: 'where-and-when',
      title: 'Where and when',
      says: `${speaking} of ${countOf(cells.length, 'cell')} speak`,
    },
    {
      id: 'fair',
      title: 'Is it fair?',
      says: fairness.warnings.length === 0 ? 'nothing to note' : countOf(fairness.warnings.length, 'note'),
    },
    { id: 'stop', title: 'May I stop?', says: stopWords(answer) },
    { id: 'choices', title: 'Would other choices say the same?', says: 'on request' },
    { id: 'stations', title: 'Station by station', says: countOf(counts.stations, 'station') },
  ];
}

function stopWords({ peekProof, marginDb }: ComparisonAnswer): string {
  const interval = peekProof?.points.at(-1)?.intervalDb;
  if (!interval) return 'too early to say';
  if (Math.max(Math.abs(interval[0]), Math.abs(interval[1])) < marginDb)
    return 'yes: no practical difference';
  return interval[0] > 0 || interval[1] < 0
    ? `yes: ${formatDbInterval(interval)}`
    : 'not yet: zero is still in';
}
