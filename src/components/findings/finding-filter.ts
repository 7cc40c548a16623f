import type { DecisionKind, FindingSummary } from '../../../shared/contracts/finding.ts';
import { decisionKinds, dueState } from './finding-words.ts';

/** Which decision a finding must have now: one kind, none yet, or a date to look again that has come. */
export type DecisionFilter = DecisionKind | 'none' | 'due';

export interface FindingFilter {
  antennaId: number | null;
  decision: DecisionFilter | null;
}

export const decisionFilters: readonly { value: DecisionFilter; word: string }[] = [
  { value: 'none', word: 'None yet' },
  ...decisionKinds.map(({ kind, word }) => ({ value: kind, word })),
  { value: 'due', word: 'To look at again now' },
];

/** Reads the filter from an address; what means nothing there filters nothing. */
export function readFilter(query: Record<string, unknown>): FindingFilter {
  const antennaId =
    typeof query.antenna === 'string' && /^\d{1,9}$/.test(query.antenna) ? Number(query.antenna) : null;
  const decision = decisionFilters.find(({ value }) => value === query.decision)?.value ?? null;
  return { antennaId, decision };
}

export function fits(finding: FindingSummary, filter: FindingFilter, today: string): boolean {
  const { antennas, latestDecision } = finding;
  if (filter.antennaId !== null && antennas.a.id !== filter.antennaId && antennas.b.id !== filter.antennaId)
    return false;
  switch (filter.decision) {
    case null:
      return true;
    case 'none':
      return latestDecision === null;
    case 'due':
      return dueState(latestDecision, today) !== null;
    default:
      return latestDecision?.decision === filter.decision;
  }
}

/** The antennas that findings are about, by their latest name, in the order of the alphabet. */
export function antennasOf(findings: readonly FindingSummary[]): { id: number; name: string }[] {
  const names = new Map<number, string>();
  for (const { antennas } of findings) {
    for (const { id, name } of [antennas.a, antennas.b]) if (!names.has(id)) names.set(id, name);
  }
  return [...names]
    .map(([id, name]) => ({ id, name }))
    .sort((one, other) => one.name.localeCompare(other.name));
}

/** One axis for several estimates, so that their marks can be held against each other: whole dB, at least 3. */
export function commonLimitDb(findings: readonly FindingSummary[]): number {
  const reach = findings.flatMap(({ estimate, marginDb }) => [
    marginDb * 1.5,
    ...(estimate ? estimate.interval95Db.map(Math.abs) : []),
  ]);
  return Math.min(20, Math.max(3, ...reach.map(Math.ceil)));
}
