import type { ComparisonResult } from '../../../shared/comparison/index.ts';

/** The parts of an answer in words, in the order in which they are told. */
const partWords: Partial<Record<keyof ComparisonResult, string>> = {
  verdict: 'the verdict',
  estimate: 'the estimate',
  counts: 'the counts',
  offsets: 'the receiver offsets',
  rank: 'the rank view',
  equivalence: 'the equivalence test',
  censored: 'the view with stations heard on one antenna only',
  peekProof: 'the peek-proof interval',
  planning: 'the planning',
  histogram: 'the picture of the differences',
  sectors: 'the picture by direction',
  bandHours: 'the picture by hour',
  nights: 'the picture by night',
  pooling: 'the pooled maps',
  heardOnlySectors: 'the stations heard on one antenna only, by sector',
  fairness: 'the fairness checks',
  stations: 'the table of stations',
};
/** Not numbers of the answer: the question itself and its names. */
const notCompared = new Set(['question', 'antennas', 'preparation', 'rules', 'marginDb', 'sectorCount']);

/**
 * Which parts of the frozen answer are not the same to the last bit, in words. Only what the frozen answer
 * has is compared: a later release may say more.
 */
export function changedParts(then: object, now: object): string[] {
  const before = then as Record<string, unknown>;
  const after = now as Record<string, unknown>;
  const known = Object.keys(partWords);
  return Object.keys(before)
    .filter((part) => !notCompared.has(part) && !sameLeaves(before[part], after[part]))
    .sort((a, b) => known.indexOf(a) - known.indexOf(b))
    .map((part) => (partWords as Record<string, string>)[part] ?? part);
}

function sameLeaves(then: unknown, now: unknown): boolean {
  if (typeof then !== 'object' || then === null) return then === now;
  if (typeof now !== 'object' || now === null) return false;
  if (Array.isArray(then)) {
    return (
      Array.isArray(now) &&
      then.length === now.length &&
      then.every((value, index) => sameLeaves(value, now[index]))
    );
  }
  return Object.entries(then).every(([key, value]) =>
    sameLeaves(value, (now as Record<string, unknown>)[key]),
  );
}
