import type { z } from 'zod';
import type { ComparisonInput } from '../../../shared/comparison/index.ts';
import type {
  ComparisonAnswer,
  ComparisonQuestion,
  comparisonPending,
} from '../../../shared/contracts/comparison.ts';
import type { Deps } from '../../platform/deps.ts';
import { InvalidRequest } from '../../platform/errors.ts';
import type { Actor } from '../../platform/route.ts';
import { listReceivers, readStation } from '../station/station.read-model.ts';
import { nightsWaiting, prepareUnits, rulesInForce } from '../units/prepare-units.ts';
import * as read from '../units/units.read-model.ts';
import { unknownIds } from './question-ids.read-model.ts';

type Pending = z.output<typeof comparisonPending>;
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

    const wanted = { station, rules: question.rules, nights: question, actor, nowMs: deps.now() };
    const jobId = await prepareUnits(dataSource, wanted);
    if (jobId !== null) return { pending: true, jobId };
    const inForce = rulesInForce(station, question.rules);

    const [pair, tallies, dirty, receivers] = await Promise.all([
      read.readPairUnits(manager, stationId, inForce.rulesKey, [a.id, b.id], question),
      read.readNightTallies(manager, stationId, inForce.rulesKey, question),
      read.readDirtyHours(manager, stationId),
      listReceivers(manager, stationId),
    ]);
    const calls = await read.readCalls(manager, stationId, distinctCalls(pair));
    return {
      input: {
        question,
        antennas: { a, b },
        receivers,
        rules: inForce.rules,
        marginDb: question.marginDb ?? station.marginDb,
        sectorCount: station.sectorCount,
        station: { latitude: station.latitudeDeg, longitude: station.longitudeDeg },
        ...pair,
        calls,
        nights: tallies.map((row) => row.tally),
      },
      preparation: {
        rulesKey: inForce.rulesKey,
        standing: inForce.standing,
        nightsWaiting: nightsWaiting(dirty, station.longitudeDeg, question, deps.now()),
        firstNight: tallies[0]?.night ?? null,
        lastNight: tallies.at(-1)?.night ?? null,
      },
    };
  }

  return {
    prepare,
    async answer(
      stationId: number,
      question: ComparisonQuestion,
      actor: Actor,
      signal?: AbortSignal,
    ): Promise<ComparisonAnswer | Pending> {
      const prepared = await prepare(stationId, question, actor);
      if ('pending' in prepared) return prepared;
      const answer = await deps.heavyWork.run('answerComparison', prepared.input, signal);
      return { ...answer, preparation: prepared.preparation };
    },
  };
}

function distinctCalls(pair: read.PairUnits): Set<number> {
  const calls = new Set<number>();
  // Rows of one call stand together: a look at the neighbour spares most of the insertions.
  for (const column of [pair.units.call, pair.heardOnly.call]) {
    for (let i = 0; i < column.length; i++) if (i === 0 || column[i] !== column[i - 1]) calls.add(column[i]!);
  }
  return calls;
}
