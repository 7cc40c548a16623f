import type { DwellChange } from '../../../shared/contracts/dwell.ts';
import { clockText } from '../../platform/clock-text.ts';
import { InvalidRequest } from '../../platform/errors.ts';
import type { DwellRecord, DwellStep } from './dwell-record.ts';
import { saysTheSame } from './dwell-record.ts';
import { spanText } from './dwell-wording.ts';

/** Who adds dwells by these changes, and when. */
export interface DwellAuthor {
  userId: string | null;
  nowMs: number;
}

/**
 * What a list of corrections does to each dwell. `stored` holds every dwell that the list names (`NotFound`
 * is the caller's). Changes are taken in order, each on the outcome of the ones before; a dwell that ends as
 * it began is left out. Overlaps are not looked for here: they depend on dwells that the list does not name.
 *
 * Throws InvalidRequest with the path of the change that makes no sense by itself.
 */
export function planChanges(
  changes: readonly DwellChange[],
  stored: ReadonlyMap<number, DwellRecord>,
  author: DwellAuthor,
): DwellStep[] {
  const steps = new Map<number, DwellStep>();
  const added: DwellStep[] = [];

  const stepOf = (dwellId: number, changeIndex: number): { step: DwellStep; dwell: DwellRecord } => {
    const before = stored.get(dwellId);
    if (!before) throw new Error(`Dwell ${dwellId} was not read before planning.`);
    const step = steps.get(dwellId) ?? { action: 'edit', before, after: { ...before }, changeIndex };
    const dwell = step.after;
    if (!dwell) throw refusal(changeIndex, 'dwellId', 'An earlier change of this list deletes this dwell.');
    step.changeIndex = changeIndex;
    steps.set(dwellId, step);
    return { step, dwell };
  };
  const add = (action: 'add' | 'split', changeIndex: number, dwell: Omit<DwellRecord, 'id'>) =>
    added.push({ action, before: null, after: { id: 0, ...dwell }, changeIndex });
  const origin = {
    importId: null,
    createdBy: author.userId,
    createdMs: author.nowMs,
    source: 'hand' as const,
  };

  changes.forEach((change, i) => {
    if (change.action === 'add') {
      const { receiverId, antennaId, startsAt, endsAt, note } = change.dwell;
      add('add', i, { receiverId, antennaId, note, ...origin, ...timesOf(startsAt, endsAt) });
      return;
    }
    const { step, dwell } = stepOf(change.dwellId, i);
    step.action = change.action;
    switch (change.action) {
      case 'edit':
        if (change.antennaId !== undefined) dwell.antennaId = change.antennaId;
        if (change.note !== undefined) dwell.note = change.note;
        if (change.startsAt !== undefined) dwell.startMs = Date.parse(change.startsAt);
        if (change.endsAt !== undefined)
          dwell.endMs = change.endsAt === null ? null : Date.parse(change.endsAt);
        if (dwell.endMs !== null && dwell.endMs <= dwell.startMs) {
          const field = change.endsAt === undefined ? 'startsAt' : 'endsAt';
          throw refusal(
            i,
            field,
            `The dwell would start at ${clockText(dwell.startMs)} and end at ${clockText(dwell.endMs)}: the end must come after the start.`,
          );
        }
        break;
      case 'split': {
        const atMs = Date.parse(change.at);
        if (atMs <= dwell.startMs || (dwell.endMs !== null && atMs >= dwell.endMs)) {
          throw refusal(
            i,
            'at',
            `Split within the dwell, which runs ${spanText(dwell.startMs, dwell.endMs)}.`,
          );
        }
        const { receiverId, endMs, note } = dwell;
        add('split', i, { receiverId, antennaId: change.antennaId, startMs: atMs, endMs, note, ...origin });
        dwell.endMs = atMs;
        break;
      }
      case 'close':
        if (dwell.endMs !== null) {
          throw refusal(
            i,
            'dwellId',
            `This dwell ended at ${clockText(dwell.endMs)} already: edit its end instead.`,
          );
        }
        dwell.endMs = Date.parse(change.at);
        if (dwell.endMs <= dwell.startMs) {
          throw refusal(i, 'at', `Close it after its start, ${clockText(dwell.startMs)}.`);
        }
        break;
      case 'delete':
        step.after = null;
    }
  });
  const kept = [...steps.values()].filter(
    ({ before, after }) => !before || !after || !saysTheSame(before, after),
  );
  return [...kept, ...added];
}

/** The first two dwells of the outcome that overlap each other, the later one first; null when none do. */
export function overlapWithin(
  steps: readonly DwellStep[],
): { step: DwellStep; inTheWay: DwellRecord } | null {
  const sorted = steps
    .flatMap((step) => (step.after ? [{ step, dwell: step.after }] : []))
    .sort((p, q) => p.dwell.receiverId - q.dwell.receiverId || p.dwell.startMs - q.dwell.startMs);
  for (let i = 1; i < sorted.length; i++) {
    const { dwell } = sorted[i - 1]!;
    const next = sorted[i]!;
    if (dwell.receiverId !== next.dwell.receiverId) continue;
    if (dwell.endMs === null || dwell.endMs > next.dwell.startMs) return { step: next.step, inTheWay: dwell };
  }
  return null;
}

function timesOf(startsAt: string, endsAt: string | null) {
  return { startMs: Date.parse(startsAt), endMs: endsAt === null ? null : Date.parse(endsAt) };
}

function refusal(changeIndex: number, field: string, message: string): InvalidRequest {
  return new InvalidRequest(message, [{ path: `body.changes.${changeIndex}.${field}`, message }]);
}
