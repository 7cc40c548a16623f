import type { Recomputation } from '../../../shared/contracts/finding.ts';
import { formatUtc } from '../../../shared/format.ts';
import type { FrozenDwell } from './evidence.ts';

export type DwellChange = Recomputation['dwells'][number];

/** The last one who changed a dwell since the finding was frozen. */
export interface DwellAuthor {
  dwellId: number;
  who: string;
  at: string;
}

interface Step {
  before: FrozenDwell | null;
  after: FrozenDwell | null;
}

/**
 * How the switch log of a finding differs from today's, as far as its two antennas are concerned. A dwell
 * equal in receiver, antenna and times is the same dwell whatever its id (an import may have been undone and
 * done again); of the others, one is taken for the successor of another when it has its id or, without one,
 * overlaps it on the same receiver.
 */
export function dwellChanges(
  then: readonly FrozenDwell[],
  now: readonly FrozenDwell[],
  antennaIds: readonly number[],
  authors: readonly DwellAuthor[],
): DwellChange[] {
  const steps = stepsBetween(then, now).filter(({ before, after }) =>
    [before, after].some((dwell) => dwell !== null && antennaIds.includes(dwell.antennaId)),
  );
  const authorOf = new Map(authors.map((author) => [author.dwellId, author]));
  return steps
    .sort((a, b) => startOf(a) - startOf(b))
    .map((step) => {
      const { before, after } = step;
      const author = authorOf.get(after?.id ?? 0) ?? authorOf.get(before?.id ?? 0);
      return {
        change: before === null ? 'added' : after === null ? 'removed' : 'changed',
        before: before && factsOf(before),
        after: after && factsOf(after),
        by: author?.who ?? null,
        at: author?.at ?? null,
        sentence: sentenceOf(step, author),
      };
    });
}

function stepsBetween(then: readonly FrozenDwell[], now: readonly FrozenDwell[]): Step[] {
  const sameAs = (dwell: FrozenDwell) =>
    [dwell.receiverId, dwell.antennaId, dwell.startMs, dwell.endMs].join();
  const today = new Map(now.map((dwell) => [sameAs(dwell), dwell]));
  const gone: FrozenDwell[] = [];
  for (const dwell of then) {
    if (!today.delete(sameAs(dwell))) gone.push(dwell);
  }
  const come = new Set(today.values());
  const successors: ((old: FrozenDwell, fresh: FrozenDwell) => boolean)[] = [
    (old, fresh) => old.id === fresh.id,
    (old, fresh) => old.receiverId === fresh.receiverId && overlap(old, fresh),
  ];
  const steps: Step[] = [];
  let left = gone;
  for (const follows of successors) {
    const unmatched: FrozenDwell[] = [];
    for (const old of left) {
      const fresh = [...come].find((each) => follows(old, each));
      if (!fresh) {
        unmatched.push(old);
        continue;
      }
      come.delete(fresh);
      steps.push({ before: old, after: fresh });
    }
    left = unmatched;
  }
  return [
    ...steps,
    ...left.map((before) => ({ before, after: null })),
    ...[...come].map((after) => ({ before: null, after })),
  ];
}

function overlap(a: FrozenDwell, b: FrozenDwell): boolean {
  return a.startMs < b.endMs && b.startMs < a.endMs;
}

function startOf({ before, after }: Step): number {
  return Math.min(before?.startMs ?? Infinity, after?.startMs ?? Infinity);
}

function factsOf(dwell: FrozenDwell) {
  return {
    receiver: dwell.receiver,
    antenna: dwell.antenna,
    startsAt: new Date(dwell.startMs).toISOString(),
    endsAt: new Date(dwell.endMs).toISOString(),
  };
}

function sentenceOf({ before, after }: Step, author: DwellAuthor | undefined): string {
  const by = author ? ` (${author.who}, ${formatUtc(author.at)})` : '';
  if (before === null) return `New dwell: ${whole(after!)}${by}.`;
  if (after === null) return `Dwell gone: ${whole(before)}${by}.`;
  const parts: string[] = [];
  if (before.antennaId !== after.antennaId) parts.push(`on ${after.antenna} instead of ${before.antenna}`);
  if (before.receiverId !== after.receiverId)
    parts.push(`of ${after.receiver} instead of ${before.receiver}`);
  if (before.startMs !== after.startMs)
    parts.push(`from ${formatUtc(after.startMs, true)} instead of ${formatUtc(before.startMs, true)}`);
  if (before.endMs !== after.endMs)
    parts.push(`to ${formatUtc(after.endMs, true)} instead of ${formatUtc(before.endMs, true)}`);
  return `Dwell changed: ${whole(before)} is now ${parts.join(', ')}${by}.`;
}

function whole(dwell: FrozenDwell): string {
  return `${dwell.receiver} on ${dwell.antenna}, ${formatUtc(dwell.startMs, true)} to ${formatUtc(dwell.endMs, true)}`;
}
