import type { EntityManager } from 'typeorm';
import type { DwellChange, DwellPreview } from '../../../shared/contracts/dwell.ts';
import { inTransaction } from '../../database/transaction.ts';
import type { Deps } from '../../platform/deps.ts';
import { Conflict, InvalidRequest, NotFound } from '../../platform/errors.ts';
import { planChanges } from './dwell-plan.ts';
import { presentDwell, recordFromSnapshot, saysTheSame } from './dwell-record.ts';
import type { DwellRecord, DwellStep } from './dwell-record.ts';
import { dwellRepository } from './dwell.repository.ts';
import type { StoredChange } from './dwell.repository.ts';
import { dwellText } from './dwell-wording.ts';
import { measure, readLogBook, refuseOverlaps, storeSteps } from './switch-log.ts';
import type { LogActor, LogBook } from './switch-log.ts';

type Audit = (manager: EntityManager, target: string, detail?: Record<string, unknown>) => Promise<void>;

export function createDwellService(deps: Deps) {
  const { dataSource } = deps;

  /** The steps of a list of changes, refused when they name what is not here or would overlap. */
  async function plan(
    manager: EntityManager,
    book: LogBook,
    changes: readonly DwellChange[],
    stored: ReadonlyMap<number, DwellRecord>,
    userId: string | null,
  ): Promise<DwellStep[]> {
    refuseUnknown(book, changes, stored);
    const steps = planChanges(changes, stored, { userId, nowMs: deps.now() });
    await refuseOverlaps(manager, book, steps);
    return steps;
  }

  return {
    /** Counted on one snapshot of log and spots, holding nobody up. */
    async preview(
      stationId: number,
      changes: readonly DwellChange[],
      actor: LogActor,
    ): Promise<DwellPreview> {
      return inTransaction(
        dataSource,
        async (manager) => {
          const book = await readLogBook(manager, stationId);
          const stored = await dwellRepository.byIds(manager, stationId, namedDwells(changes));
          return measure(manager, book, await plan(manager, book, changes, stored, actor.userId));
        },
        { isolation: 'REPEATABLE READ' },
      );
    },

    async apply(stationId: number, changes: readonly DwellChange[], actor: LogActor, audit: Audit) {
      return inTransaction(dataSource, async (manager) => {
        const book = await readLogBook(manager, stationId);
        const dwellIds = namedDwells(changes);
        // A dwell never changes its receiver: what is read before the lock is enough to know what to lock.
        const unlocked = await dwellRepository.byIds(manager, stationId, dwellIds);
        refuseUnknown(book, changes, unlocked);
        await dwellRepository.lockReceivers(manager, stationId, [
          ...changes.flatMap((change) => (change.action === 'add' ? [change.dwell.receiverId] : [])),
          ...[...unlocked.values()].map((dwell) => dwell.receiverId),
        ]);
        const stored = await dwellRepository.byIds(manager, stationId, dwellIds);
        const steps = await plan(manager, book, changes, stored, actor.userId);
        if (steps.length === 0) throw new InvalidRequest('These changes leave the switch log as it is.');
        const preview = await measure(manager, book, steps);
        const batchId = await storeSteps(manager, book, steps, actor);
        await audit(manager, batchId, auditDetail(steps, preview));
        return { batchId, dwells: outcomeOf(steps), preview };
      });
    },

    /**
     * Puts every dwell of a batch back as it was before, as a batch of its own that can be taken back in
     * turn. What decides is the log as it stands: a later change that was itself taken back is no obstacle.
     */
    async undo(stationId: number, batchId: string, actor: LogActor, audit: Audit) {
      return inTransaction(dataSource, async (manager) => {
        const book = await readLogBook(manager, stationId);
        const changes = await dwellRepository.batch(manager, stationId, batchId);
        if (changes.length === 0) throw new NotFound('This change of the switch log');
        if (changes.some((change) => change.action === 'import')) {
          throw new Conflict('An import is taken back as a whole, under Imports.');
        }
        await dwellRepository.lockReceivers(manager, stationId, receiversOf(changes));
        const stored = await dwellRepository.byIds(
          manager,
          stationId,
          changes.map((change) => change.dwellId),
        );
        const steps = changes.map((change) => reverse(change, stored.get(change.dwellId) ?? null, book));
        await refuseOverlaps(manager, book, steps);
        const preview = await measure(manager, book, steps);
        const undoneBy = await storeSteps(manager, book, steps, actor);
        await audit(manager, undoneBy, { undoes: batchId, ...auditDetail(steps, preview) });
        return { batchId: undoneBy, dwells: outcomeOf(steps), preview };
      });
    },
  };
}

function namedDwells(changes: readonly DwellChange[]): number[] {
  return [...new Set(changes.flatMap((change) => (change.action === 'add' ? [] : [change.dwellId])))];
}

function refuseUnknown(
  book: LogBook,
  changes: readonly DwellChange[],
  stored: ReadonlyMap<number, DwellRecord>,
): void {
  for (const change of changes) {
    const { receiverId, antennaId } =
      change.action === 'add' ? change.dwell : { receiverId: undefined, antennaId: antennaOf(change) };
    if (change.action !== 'add' && !stored.has(change.dwellId)) throw new NotFound(`Dwell ${change.dwellId}`);
    if (receiverId !== undefined && !book.receivers.has(receiverId))
      throw new NotFound(`Receiver ${receiverId}`);
    if (antennaId !== undefined && !book.antennas.has(antennaId)) throw new NotFound(`Antenna ${antennaId}`);
  }
}

function antennaOf(change: DwellChange): number | undefined {
  return 'antennaId' in change ? change.antennaId : undefined;
}

function receiversOf(changes: readonly StoredChange[]): number[] {
  return [...new Set(changes.map((change) => (change.before ?? change.after)!.receiverId))];
}

/** The step that takes one stored change back. Throws Conflict when the dwell is no longer as it left it. */
function reverse(change: StoredChange, now: DwellRecord | null, book: LogBook): DwellStep {
  const { dwellId } = change;
  const left = change.after && recordFromSnapshot(dwellId, change.after);
  const restored = change.before && recordFromSnapshot(dwellId, change.before);
  const isAsLeft = left === null ? now === null : now !== null && saysTheSame(left, now);
  if (!isAsLeft) {
    const dwell = dwellText((left ?? restored)!, book.names);
    throw new Conflict(
      left === null
        ? `This change cannot be taken back: the dwell that it deleted, ${dwell}, is there again.`
        : `This change cannot be taken back: a later one touches the same dwell, ${dwell}. Take the later one back first.`,
    );
  }
  if (restored && !book.antennas.has(restored.antennaId)) {
    throw new Conflict(
      `This change cannot be taken back: the antenna of ${dwellText(restored, book.names)} has been removed since.`,
    );
  }
  return { action: 'undo', before: now, after: restored, changeIndex: null };
}

function outcomeOf(steps: readonly DwellStep[]) {
  return steps.flatMap((step) => (step.after ? [presentDwell(step.after)] : []));
}

function auditDetail(steps: readonly DwellStep[], preview: DwellPreview): Record<string, unknown> {
  return { dwells: steps.length, spotsChangingAntenna: preview.spotsChangingAntenna };
}
