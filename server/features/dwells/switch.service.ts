import type { EntityManager } from 'typeorm';
import type { BodyOf, ReplyOf } from '../../../shared/contracts/endpoint.ts';
import type { switchReceiver } from '../../../shared/contracts/dwell.ts';
import type { Antenna } from '../../database/entities/antenna.ts';
import type { Receiver } from '../../database/entities/receiver.ts';
import { inTransaction } from '../../database/transaction.ts';
import type { Deps } from '../../platform/deps.ts';
import { clockText } from '../../platform/clock-text.ts';
import { Conflict, InvalidRequest, NotFound } from '../../platform/errors.ts';
import { presentDwell } from './dwell-record.ts';
import type { DwellRecord, DwellStep } from './dwell-record.ts';
import { dwellRepository } from './dwell.repository.ts';
import { dwellText } from './dwell-wording.ts';
import { readLogBook, serviceWarnings, storeSteps } from './switch-log.ts';
import type { LogActor, LogBook } from './switch-log.ts';

type Audit = (manager: EntityManager, target: string, detail?: Record<string, unknown>) => Promise<void>;
type SwitchReply = ReplyOf<typeof switchReceiver>;

/** Clocks differ a little: a switch may be this far ahead of ours. */
const aheadMs = 60_000;

export function createSwitchService(deps: Deps) {
  return {
    /**
     * "Now on": ends the receiver's open dwell and starts the next, in one transaction. It only ever adds at
     * the end of the log: what lies inside the log already is a correction and goes another way.
     *
     * The receiver's row is locked first. Of several requests at once each sees what the one before has
     * stored; each without a time of its own takes the time at which its turn comes.
     */
    async switchTo(
      stationId: number,
      body: BodyOf<typeof switchReceiver>,
      actor: LogActor,
      audit: Audit,
    ): Promise<SwitchReply> {
      const givenMs = body.at === undefined ? null : Date.parse(body.at);
      if (givenMs !== null && givenMs > deps.now() + aheadMs) {
        const message = `${clockText(givenMs)} lies ahead: a switch is logged when it happens, at most a minute early.`;
        throw new InvalidRequest(message, [{ path: 'body.at', message }]);
      }
      return inTransaction(deps.dataSource, async (manager) => {
        const book = await readLogBook(manager, stationId);
        const receiver = findReceiver(book, body.receiver);
        const antenna = body.antenna === null ? null : findAntenna(book, body.antenna);
        if (receiver.retiredAt) throw new Conflict(`${receiver.callSign} is retired: it is on no antenna.`);
        await dwellRepository.lockReceivers(manager, stationId, [receiver.id]);
        const newest = await dwellRepository.newest(manager, stationId, receiver.id);
        const atMs = switchTime(givenMs, deps.now(), newest, book);
        const open = newest?.endMs === null ? newest : null;
        if ((open?.antennaId ?? null) === (antenna?.id ?? null)) {
          return { dwell: open && presentDwell(open), changed: false, warning: null };
        }

        if (open && atMs === open.startMs) throw insideLog(atMs, open, book);
        const steps: DwellStep[] = [];
        if (open) steps.push({ ...step('close'), before: open, after: { ...open, endMs: atMs } });
        if (antenna) {
          const dwell: DwellRecord = {
            ...{ id: 0, receiverId: receiver.id, antennaId: antenna.id, startMs: atMs, endMs: null },
            ...{ source: actor.tokenId === null ? 'hand' : 'token', note: '', importId: null },
            ...{ createdBy: actor.userId, createdMs: deps.now() },
          };
          steps.push({ ...step('add'), before: null, after: dwell });
        }
        await storeSteps(manager, book, steps, actor);
        await audit(manager, String(receiver.id), {
          receiver: receiver.callSign,
          antenna: antenna?.name ?? null,
          at: clockText(atMs),
        });
        const added = steps.find((one) => one.before === null)?.after ?? null;
        const warning =
          serviceWarnings(
            book,
            steps.filter((one) => one.before === null),
          )[0] ?? null;
        return { dwell: added && presentDwell(added), changed: true, warning };
      });
    },
  };
}

const step = (action: 'add' | 'close') => ({ action, changeIndex: null });

/**
 * When the switch happened. A time that was given must not lie inside the log. Our own may be a hair behind
 * the log (another server's clock, two switches in one millisecond): then it follows the log at once.
 */
function switchTime(givenMs: number | null, nowMs: number, newest: DwellRecord | null, book: LogBook) {
  if (!newest) return givenMs ?? nowMs;
  const logEndMs = newest.endMs ?? newest.startMs;
  if (givenMs !== null) {
    // The open dwell's own start is let through: the same switch may be sent twice.
    if (givenMs < logEndMs) throw insideLog(givenMs, newest, book);
    return givenMs;
  }
  const earliestMs = newest.endMs ?? newest.startMs + 1;
  // Twice: switches that follow one that was a whole minute ahead each move on by a millisecond.
  if (earliestMs > nowMs + 2 * aheadMs) {
    throw new Conflict(
      `The log reaches beyond now: it has ${dwellText(newest, book.names)}. Correct that dwell first.`,
    );
  }
  return Math.max(nowMs, earliestMs);
}

function insideLog(atMs: number, newest: DwellRecord, book: LogBook): Conflict {
  const message = `${clockText(atMs)} lies inside the log, which has ${dwellText(newest, book.names)}. Correct the log instead of switching.`;
  return new Conflict(message, [{ path: 'body.at', message }]);
}

function findReceiver(book: LogBook, given: number | string): Receiver {
  const all = [...book.receivers.values()];
  const wanted = String(given).toUpperCase();
  const found =
    typeof given === 'number'
      ? book.receivers.get(given)
      : all.find((receiver) => receiver.callSign.toUpperCase() === wanted);
  if (!found) throw new NotFound(typeof given === 'number' ? `Receiver ${given}` : `A receiver ${wanted}`);
  return found;
}

function findAntenna(book: LogBook, given: number | string): Antenna {
  const wanted = String(given).toLowerCase();
  const found =
    typeof given === 'number'
      ? book.antennas.get(given)
      : [...book.antennas.values()].find((antenna) => antenna.name.toLowerCase() === wanted);
  if (!found)
    throw new NotFound(typeof given === 'number' ? `Antenna ${given}` : `An antenna named ${given}`);
  return found;
}
