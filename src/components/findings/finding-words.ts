import type { VerdictCode } from '../../../shared/contracts/comparison.ts';
import type { QuestionNames } from '../../../shared/contracts/comparison-sentence.ts';
import type { Decision, DecisionKind, Finding, FindingSummary } from '../../../shared/contracts/finding.ts';

type Antennas = FindingSummary['antennas'];

export const decisionKinds: readonly { kind: DecisionKind; word: string; means: string }[] = [
  { kind: 'keep', word: 'Keep', means: 'It stays as it is.' },
  { kind: 'rebuild', word: 'Rebuild', means: 'It is to be mended, moved or made anew.' },
  { kind: 'take down', word: 'Take down', means: 'It goes.' },
  { kind: 'look again', word: 'Look again', means: 'Not decided yet: ask again on a date.' },
];

/** "Keep North-east wire", "Look again on 2027-03-01". */
export function decisionText(given: Pick<Decision, 'decision' | 'antennaName' | 'lookAgainOn'>): string {
  const word = decisionKinds.find(({ kind }) => kind === given.decision)!.word;
  const about = given.antennaName === null ? '' : ` ${given.antennaName}`;
  if (given.decision !== 'look again') return word + about;
  return `Look again${about === '' ? '' : ` at${about}`} on ${given.lookAgainOn}`;
}

/** Whether a date to look again has come. `today` is a UTC day, as the dates are. */
export function dueState(
  given: Pick<Decision, 'lookAgainOn'> | null,
  today: string,
): 'overdue' | 'today' | null {
  const on = given?.lookAgainOn ?? null;
  if (on === null || on > today) return null;
  return on === today ? 'today' : 'overdue';
}

/** The verdict in a few words, with the antennas by name: "North-east wire clearly better". */
export function verdictWords(code: VerdictCode, { a, b }: Antennas): string {
  switch (code) {
    case 'a clearly better':
      return `${a.name} clearly better`;
    case 'a better':
      return `${a.name} better`;
    case 'b clearly better':
      return `${b.name} clearly better`;
    case 'b better':
      return `${b.name} better`;
    default:
      return code.charAt(0).toUpperCase() + code.slice(1);
  }
}

/** "2026-11-01 to 2026-11-14", or the one night. */
export function nightsWords({
  firstNight,
  lastNight,
}: Pick<FindingSummary, 'firstNight' | 'lastNight'>): string {
  return firstNight === lastNight ? firstNight : `${firstNight} to ${lastNight}`;
}

/** Names as they were when the finding was frozen: today's station may know others. */
export function frozenNames({ antennas, receivers, answer }: Finding): QuestionNames {
  return {
    antenna: (id) => [antennas.a, antennas.b].find((each) => each.id === id)?.name ?? `antenna ${id}`,
    receiver: (id) => receivers.find((each) => each.id === id)?.label ?? `receiver ${id}`,
    sectorCount: answer.sectorCount,
  };
}

/** Start of file names: letters and digits of a title, with hyphens between. */
export function fileStemOf(title: string): string {
  return (
    title
      .toLowerCase()
      .replace(/[^a-z0-9]+/g, '-')
      .replace(/^-|-$/g, '') || 'finding'
  );
}

/** A digest in eights, so that two can be compared by eye. */
export function inGroups(digest: string): string[] {
  return digest.match(/.{1,8}/g) ?? [];
}
