import type { z } from 'zod';
import { answerComparison } from '../../../shared/comparison/index.ts';
import type { ComparisonInput } from '../../../shared/comparison/index.ts';
import type {
  ComparisonAnswer,
  ComparisonQuestion,
  comparisonPending,
} from '../../../shared/contracts/comparison.ts';
import { may } from '../../../shared/contracts/permission.ts';
import type { Station as StationReply } from '../../../shared/contracts/station.ts';
import { rulesKey } from '../../../shared/pairing/index.ts';
import type { PairingRules } from '../../../shared/pairing/index.ts';
import { nightDate, nightIndexOf } from '../../../shared/radio/night.ts';
import { inTransaction } from '../../database/transaction.ts';
import type { Deps } from '../../platform/deps.ts';
import { InvalidRequest, NotAllowed } from '../../platform/errors.ts';
import { enqueueJob } from '../../platform/job-queue.ts';
import type { Actor } from '../../platform/route.ts';
import { listReceivers, readStation } from '../station/station.read-model.ts';
import * as read from './comparison.read-model.ts';
import { unknownIds } from './question-ids.read-model.ts';

type Pending = z.input<typeof comparisonPending>;
export interface Prepared {
  input: ComparisonInput;
  preparation: ComparisonAnswer['preparation'];
}

export function createComparisonService(deps: Deps) {
  const { dataSource } = deps;
  const { manager } = dataSource;

  /** Reads what an answer needs; a job id where units under these rules have to be made first. */
  async function prepare(
    stationId: number,
    question: ComparisonQuestion,
    actor: Actor,
  ): Promise<Prepared | Pending> {
    const station = await readStation(manager, stationId);
    const [a, b, unknownNames] = await Promise.all([
      read.findAntenna(manager, stationId, question.antennaA),
      read.findAntenna(manager, stationId, question.antennaB),
      unknownIds(manager, stationId, question, 'body'),
    ]);
    const unknown = [
      ...unknownNames,
      ...question.sectors
        .filter((sector) => sector >= station.sectorCount)
        .map((sector) => ({
          path: 'body.sectors',
          message: `The station has sectors 0 to ${station.sectorCount - 1}, not ${sector}.`,
        })),
    ];
    if (!a || !b || unknown.length > 0) throw new InvalidRequest('Some fields have to change.', unknown);

    const standing = standingRules(station);
    const rules: PairingRules = question.rules ?? standing;
    const key = rulesKey(rules);
    const isStanding = key === rulesKey(standing);
    if (!isStanding) {
      const missing = await read.countMissingNights(manager, stationId, rulesKey(standing), key, question);
      if (missing > 0) return { pending: true, jobId: await requestUnits(stationId, key, actor) };
    }

    const [pair, tallies, dirty, receivers] = await Promise.all([
      read.readPairUnits(manager, stationId, key, [a.id, b.id], question),
      read.readNightTallies(manager, stationId, key, question),
      read.readDirtyHours(manager, stationId),
      listReceivers(manager, stationId),
    ]);
    const calls = await read.readCalls(manager, stationId, distinctCalls(pair));
    return {
      input: {
        question,
        antennas: { a, b },
        receivers,
        rules: { ...rules, blockMinutes: rules.blockMinutes as ComparisonAnswer['rules']['blockMinutes'] },
        marginDb: question.marginDb ?? station.marginDb,
        sectorCount: station.sectorCount,
        station: { latitude: station.latitudeDeg, longitude: station.longitudeDeg },
        ...pair,
        calls,
        nights: tallies.map((row) => row.tally),
      },
      preparation: {
        rulesKey: key,
        standing: isStanding,
        nightsWaiting: nightsWaiting(dirty, station.longitudeDeg, question, deps.now()),
        firstNight: tallies[0]?.night ?? null,
        lastNight: tallies.at(-1)?.night ?? null,
      },
    };
  }

  async function requestUnits(stationId: number, key: string, actor: Actor): Promise<number> {
    if (!actor.role || !may(actor.role, 'comparison:prepare')) {
      throw new NotAllowed(
        'Nobody has asked under these rules yet, and your role cannot have the units made. Use the rules of the station, or ask an analyst.',
      );
    }
    return inTransaction(dataSource, async (transaction) => {
      // Two people asking at once get the same job.
      await transaction.query('SELECT pg_advisory_xact_lock(hashtext($1))', [`units ${stationId} ${key}`]);
      return (
        (await read.findUnitsJob(transaction, stationId, key)) ??
        (await enqueueJob(transaction, stationId, 'units', { rulesKey: key }, actor.userId))
      );
    });
  }

  return {
    prepare,
    async answer(
      stationId: number,
      question: ComparisonQuestion,
      actor: Actor,
    ): Promise<ComparisonAnswer | Pending> {
      const prepared = await prepare(stationId, question, actor);
      if ('pending' in prepared) return prepared;
      return { ...answerComparison(prepared.input), preparation: prepared.preparation };
    },
  };
}

export function standingRules(station: StationReply): PairingRules {
  const { blockMinutes, windowSeconds, freqToleranceKhz, guardSeconds } = station;
  return { blockMinutes, windowSeconds, freqToleranceKhz, guardSeconds };
}

function distinctCalls(pair: read.PairUnits): Set<number> {
  const calls = new Set<number>();
  // Rows of one call stand together: a look at the neighbour spares most of the insertions.
  for (const column of [pair.units.call, pair.heardOnly.call]) {
    for (let i = 0; i < column.length; i++) if (i === 0 || column[i] !== column[i - 1]) calls.add(column[i]!);
  }
  return calls;
}

/**
 * Nights whose units follow a correction or an import. The night of the present does not count: live spots
 * mark it all the time, and it is followed every few seconds anyway.
 */
function nightsWaiting(
  dirtyHoursMs: number[],
  longitudeDeg: number,
  nights: read.NightRange,
  nowMs: number,
): number {
  const dates = new Set(dirtyHoursMs.map((ms) => nightDate(nightIndexOf(ms, longitudeDeg))));
  dates.delete(nightDate(nightIndexOf(nowMs, longitudeDeg)));
  return [...dates].filter(
    (date) =>
      (nights.fromNight === null || date >= nights.fromNight) &&
      (nights.toNight === null || date <= nights.toNight),
  ).length;
}
