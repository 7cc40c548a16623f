import type { z } from 'zod';
import type { Antenna } from '../../../shared/contracts/antenna.ts';
import type { comparisonPending } from '../../../shared/contracts/comparison.ts';
import type { LadderAnswer, LadderQuestion } from '../../../shared/contracts/ladder.ts';
import type { Receiver } from '../../../shared/contracts/receiver.ts';
import type { Deps } from '../../platform/deps.ts';
import { InvalidRequest } from '../../platform/errors.ts';
import type { FieldError } from '../../platform/errors.ts';
import type { Actor } from '../../platform/route.ts';
import { listAntennas, listReceivers, readStation } from '../station/station.read-model.ts';
import { nightsWaiting, prepareUnits, rulesInForce } from '../units/prepare-units.ts';
import { readCalls, readDirtyHours } from '../units/units.read-model.ts';
import { readAllUnits, readNightsMade } from './ladder.read-model.ts';

type Pending = z.output<typeof comparisonPending>;

export function createLadderService(deps: Deps) {
  const { dataSource } = deps;
  const { manager } = dataSource;

  return {
    /** All antennas of the station on one scale; a job id where units under these rules have to be made first. */
    async answer(
      stationId: number,
      question: LadderQuestion,
      actor: Actor,
      signal?: AbortSignal,
    ): Promise<LadderAnswer | Pending> {
      const [station, antennas, receivers] = await Promise.all([
        readStation(manager, stationId),
        listAntennas(manager, stationId),
        listReceivers(manager, stationId),
      ]);
      const unknown = unknownNames(question, antennas, receivers, station.sectorCount);
      if (unknown.length > 0) throw new InvalidRequest('Some fields have to change.', unknown);

      const jobId = await prepareUnits(dataSource, {
        station,
        rules: question.rules,
        nights: question,
        actor,
        nowMs: deps.now(),
      });
      if (jobId !== null) return { pending: true, jobId };
      const { rules, rulesKey, standing } = rulesInForce(station, question.rules);
      const [units, made, dirty] = await Promise.all([
        readAllUnits(manager, stationId, rulesKey, question),
        readNightsMade(manager, stationId, rulesKey, question),
        readDirtyHours(manager, stationId),
      ]);
      const today = new Date(deps.now()).toISOString().slice(0, 10);
      const answer = await deps.heavyWork.run(
        'answerLadder',
        {
          question,
          antennas: antennas.map((antenna) => ({
            id: antenna.id,
            name: antenna.name,
            marker: antenna.marker,
            headingDeg: antenna.headingDeg,
            inService: isInService(antenna, today),
          })),
          receivers: receivers.map(({ id, callSign, label, retiredAt }) => ({
            ...{ id, callSign, label },
            retired: retiredAt !== null,
          })),
          rules,
          marginDb: question.marginDb ?? station.marginDb,
          sectorCount: station.sectorCount,
          station: { latitude: station.latitudeDeg, longitude: station.longitudeDeg },
          units,
          calls: await readCalls(manager, stationId, distinct(units.call)),
        },
        signal,
      );
      return {
        ...answer,
        preparation: {
          rulesKey,
          standing,
          nightsWaiting: nightsWaiting(dirty, station.longitudeDeg, question, deps.now()),
          ...made,
        },
      };
    },
  };
}

function isInService({ inServiceFrom, inServiceTo }: Antenna, day: string): boolean {
  return (inServiceFrom === null || inServiceFrom <= day) && (inServiceTo === null || inServiceTo >= day);
}

/** What a question names and the station does not have, as sentences beside the fields. */
function unknownNames(
  question: LadderQuestion,
  antennas: Antenna[],
  receivers: Receiver[],
  sectorCount: number,
): FieldError[] {
  const errors: FieldError[] = [];
  const { referenceAntennaId } = question;
  if (referenceAntennaId !== null && !antennas.some(({ id }) => id === referenceAntennaId))
    errors.push({ path: 'body.referenceAntennaId', message: 'The station has no such antenna.' });
  if (question.receivers.some((asked) => !receivers.some(({ id }) => id === asked)))
    errors.push({ path: 'body.receivers', message: 'The station has no such receiver.' });
  for (const sector of question.sectors.filter((asked) => asked >= sectorCount)) {
    errors.push({
      path: 'body.sectors',
      message: `The station has sectors 0 to ${sectorCount - 1}, not ${sector}.`,
    });
  }
  return errors;
}

function distinct(call: Int32Array): Set<number> {
  const calls = new Set<number>();
  // Rows of one call stand together: a look at the neighbour spares most of the insertions.
  for (let i = 0; i < call.length; i++) if (i === 0 || call[i] !== call[i - 1]) calls.add(call[i]!);
  return calls;
}
