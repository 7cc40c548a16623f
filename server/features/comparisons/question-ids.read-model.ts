import type { EntityManager } from 'typeorm';
import type { ComparisonQuestion } from '../../../shared/contracts/comparison.ts';
import type { FieldError } from '../../platform/errors.ts';
import { listAntennas, listReceivers } from '../station/station.read-model.ts';

/** What a question names and the station does not have, as sentences beside the fields under `path`. */
export async function unknownIds(
  manager: EntityManager,
  stationId: number,
  question: Pick<ComparisonQuestion, 'antennaA' | 'antennaB' | 'receivers'>,
  path: string,
): Promise<FieldError[]> {
  const [antennas, receivers] = await Promise.all([
    listAntennas(manager, stationId),
    question.receivers.length > 0 ? listReceivers(manager, stationId) : [],
  ]);
  const errors: FieldError[] = [];
  for (const side of ['antennaA', 'antennaB'] as const) {
    if (!antennas.some((each) => each.id === question[side]))
      errors.push({ path: `${path}.${side}`, message: 'The station has no such antenna.' });
  }
  if (question.receivers.some((id) => !receivers.some((each) => each.id === id)))
    errors.push({ path: `${path}.receivers`, message: 'The station has no such receiver.' });
  return errors;
}
