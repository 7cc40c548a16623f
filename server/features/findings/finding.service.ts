import type { EntityManager } from 'typeorm';
import type { z } from 'zod';
import type { ComparisonInput } from '../../../shared/comparison/index.ts';
import type {
  ComparisonAnswer,
  comparisonPending,
  ComparisonQuestion,
} from '../../../shared/contracts/comparison.ts';
import type * as contract from '../../../shared/contracts/finding.ts';
import type { BodyOf } from '../../../shared/contracts/endpoint.ts';
import {
  nightDate,
  nightEndMs,
  nightIndexOf,
  nightIndexOfDate,
  nightStartMs,
} from '../../../shared/radio/night.ts';
import { inTransaction } from '../../database/transaction.ts';
import type { Deps } from '../../platform/deps.ts';
import { Conflict, InvalidRequest, NotFound } from '../../platform/errors.ts';
import { programVersion } from '../../platform/program-version.ts';
import type { Actor } from '../../platform/route.ts';
import { unknownIds } from '../comparisons/question-ids.read-model.ts';
import { listReceivers, readStation } from '../station/station.read-model.ts';
import { listTrials } from '../trials/trial.read-model.ts';
import * as around from './circumstances.read-model.ts';
import type { Evidence } from './evidence.ts';
import * as read from './finding.read-model.ts';
import { findingRepository } from './finding.repository.ts';
import type { RecomputeInput } from './recompute.ts';

type Pending = z.input<typeof comparisonPending>;
type FindingReply = z.input<typeof contract.finding>;
type Audit = (manager: EntityManager, target: string, detail?: Record<string, unknown>) => Promise<void>;

/** Reads what an answer is made of, or has its units made first: the comparisons' own way of asking. */
export type AskQuestion = (
  stationId: number,
  question: ComparisonQuestion,
  actor: Actor,
) => Promise<{ input: ComparisonInput; preparation: ComparisonAnswer['preparation'] } | Pending>;

const version = programVersion();

export function createFindingService(deps: Deps, ask: AskQuestion) {
  const { dataSource } = deps;
  const { manager } = dataSource;

  async function found(stationId: number, findingId: number): Promise<FindingReply> {
    const finding = await read.readFinding(manager, stationId, findingId);
    if (!finding) throw new NotFound('This finding');
    return finding;
  }

  async function questionOf(
    stationId: number,
    body: BodyOf<typeof contract.freezeFinding>,
  ): Promise<ComparisonQuestion> {
    const [trial] = body.trialId === null ? [] : await listTrials(manager, stationId, body.trialId);
    if (body.trialId !== null && !trial) {
      throw new InvalidRequest('Some fields have to change.', [
        { path: 'body.trialId', message: 'The station has no such trial.' },
      ]);
    }
    const question = (body.question ?? trial?.question)!;
    const unknown = await unknownIds(manager, stationId, question, 'body.question');
    if (unknown.length > 0) throw new InvalidRequest('Some fields have to change.', unknown);
    return question;
  }

  /**
   * Sectors and receivers only choose among the units: a station that has fewer of them today must not refuse.
   * Without one of its antennas there is nothing to ask.
   */
  async function askAgain(stationId: number, question: ComparisonQuestion, actor: Actor) {
    try {
      return await ask(stationId, { ...question, sectors: [], receivers: [] }, actor);
    } catch (error) {
      if (!(error instanceof InvalidRequest)) throw error;
      throw new Conflict(
        'One of the two antennas has been removed from the station: today there is nothing to hold against the finding.',
        [],
        'antenna-removed',
      );
    }
  }

  return {
    found,

    /**
     * Freezes finished nights only: a night that is still going on would never again give the same numbers.
     * The question's open ends become the first and the last night that there are.
     */
    async freeze(
      stationId: number,
      body: BodyOf<typeof contract.freezeFinding>,
      actor: Actor,
      audit: Audit,
      signal: AbortSignal,
    ): Promise<number | Pending> {
      const asked = await questionOf(stationId, body);
      const station = await readStation(manager, stationId);
      const tonight = nightDate(nightIndexOf(deps.now(), station.longitudeDeg));
      const lastFinished = nightDate(nightIndexOf(deps.now(), station.longitudeDeg) - 1);
      const reachesTonight = asked.toNight === null || asked.toNight >= tonight;
      const toNight = reachesTonight ? lastFinished : asked.toNight;
      if (asked.fromNight !== null && asked.fromNight > lastFinished) throw nothingFinished();

      const ready = await ask(stationId, { ...asked, toNight }, actor);
      if ('pending' in ready) return ready;
      const { firstNight, lastNight, nightsWaiting } = ready.preparation;
      if (nightsWaiting > 0) throw unitsWaiting();
      if (firstNight === null || lastNight === null) throw nothingFinished();
      const nights = {
        fromNight: asked.fromNight ?? firstNight,
        // A day that was named stays; of "until now" the last night with data is left.
        toNight: asked.toNight === null ? lastNight : toNight!,
      };
      const question = {
        ...asked,
        ...nights,
        rules: { ...ready.input.rules },
        marginDb: ready.input.marginDb,
      };
      const span = spanOf(nights, station.longitudeDeg);
      const evidence: Evidence = {
        input: { ...ready.input, question },
        dwells: await around.readDwells(manager, stationId, span.fromMs, span.toMs),
      };
      const { preparation } = ready;
      const frozen = await deps.heavyWork.run('freezeAnswer', { evidence, preparation }, signal);
      const { answer } = frozen;
      if (answer.counts.units === 0) {
        throw new Conflict(
          `There is nothing to freeze yet. ${answer.verdict.sentence}`,
          [],
          'nothing-to-freeze',
        );
      }
      const receivers = await listReceivers(manager, stationId);
      const headline: read.Headline = {
        antennas: answer.antennas,
        verdict: answer.verdict,
        estimate: answer.estimate,
        marginDb: answer.marginDb,
        counts: answer.counts,
      };
      const circumstances: read.Circumstances = {
        station: {
          name: station.name,
          callSign: station.callSign,
          locator: station.locator,
          latitudeDeg: station.latitudeDeg,
          longitudeDeg: station.longitudeDeg,
        },
        receivers: receivers.map(({ id, callSign, label }) => ({ id, callSign, label })),
        leftOutNight:
          reachesTonight && (await around.nightHasUnits(manager, stationId, tonight)) ? tonight : null,
      };
      return inTransaction(dataSource, async (transaction) => {
        const id = await findingRepository.add(transaction, {
          stationId,
          trialId: body.trialId,
          title: body.title,
          note: body.note,
          question,
          sentence: frozen.sentence,
          headline,
          answer,
          circumstances: { ...circumstances },
          firstNight: nights.fromNight,
          lastNight: nights.toNight,
          digest: Buffer.from(frozen.digest, 'hex'),
          nightDigests: frozen.nightDigests,
          evidence: Buffer.from(frozen.packed),
          dwellCount: evidence.dwells.length,
          pictures: frozen.pictures,
          programVersion: version,
          frozenBy: actor.userId,
          frozenByName: await around.personName(transaction, actor.userId),
        });
        await audit(transaction, String(id), { name: body.title, digest: frozen.digest });
        return id;
      });
    },

    async recompute(
      stationId: number,
      findingId: number,
      actor: Actor,
      signal: AbortSignal,
    ): Promise<contract.Recomputation | Pending> {
      const finding = await found(stationId, findingId);
      const packed = await read.readEvidence(manager, stationId, findingId);
      const { question } = finding;
      const ready = await askAgain(stationId, question as ComparisonQuestion, actor);
      if ('pending' in ready) return ready;
      const station = await readStation(manager, stationId);
      const since = new Date(finding.frozenAt);
      const { fromMs, toMs } = spanOf(
        { fromNight: finding.firstNight, toNight: finding.lastNight },
        finding.station.longitudeDeg,
      );
      const [dwells, authors, imports] = await Promise.all([
        around.readDwells(manager, stationId, fromMs, toMs),
        around.readDwellAuthors(manager, stationId, since, fromMs, toMs),
        around.readImportEvents(manager, stationId, since, fromMs, toMs),
      ]);
      const { blockMinutes, windowSeconds, freqToleranceKhz, guardSeconds } = station;
      const given: RecomputeInput = {
        packed: packed!,
        then: {
          answer: finding.answer as ComparisonAnswer,
          digest: finding.digest,
          programVersion: finding.programVersion,
          locator: finding.station.locator,
          nights: finding.nightDigests.length,
        },
        now: {
          input: ready.input,
          ...{ dwells, authors, imports },
          station: {
            locator: station.locator,
            latitudeDeg: station.latitudeDeg,
            longitudeDeg: station.longitudeDeg,
            rules: {
              blockMinutes: blockMinutes as ComparisonInput['rules']['blockMinutes'],
              ...{ windowSeconds, freqToleranceKhz, guardSeconds },
            },
            marginDb: station.marginDb,
            sectorCount: station.sectorCount,
          },
          programVersion: version,
          nightsWaiting: ready.preparation.nightsWaiting,
        },
        checkedAt: new Date(deps.now()).toISOString(),
      };
      return deps.heavyWork.run('recomputeAnswer', given, signal);
    },

    async decide(
      stationId: number,
      findingId: number,
      body: BodyOf<typeof contract.addDecision>,
      actor: Actor,
      audit: Audit,
    ): Promise<z.input<typeof contract.decision>> {
      const headline = await read.readHeadline(manager, stationId, findingId);
      if (!headline) throw new NotFound('This finding');
      const { decision, about, lookAgainOn, reason } = body;
      const id = await inTransaction(dataSource, async (transaction) => {
        const added = await findingRepository.decide(transaction, {
          ...{ stationId, findingId, decision, about, lookAgainOn, reason },
          decidedBy: actor.userId,
          decidedByName: await around.personName(transaction, actor.userId),
        });
        await audit(transaction, String(findingId), {
          name: headline.title,
          ...{ decision, about, lookAgainOn },
        });
        return added;
      });
      const decisions = await read.listDecisions(manager, stationId, findingId, headline);
      return decisions.find((each) => each.id === id)!;
    },
  };
}

/** The instants between which the nights of a finding lie. */
function spanOf(
  nights: { fromNight: string; toNight: string },
  longitudeDeg: number,
): { fromMs: number; toMs: number } {
  return {
    fromMs: nightStartMs(nightIndexOfDate(nights.fromNight), longitudeDeg),
    toMs: nightEndMs(nightIndexOfDate(nights.toNight), longitudeDeg),
  };
}

function nothingFinished(): Conflict {
  return new Conflict(
    'There is no finished night with data in this range yet. A night ends at noon, local solar time.',
    [],
    'nothing-to-freeze',
  );
}

function unitsWaiting(): Conflict {
  return new Conflict(
    'Some nights changed and their units are being made anew. Freeze when they are ready.',
    [],
    'units-pending',
  );
}
