import type { EntityManager } from 'typeorm';
import type { ImportMapping } from '../../../shared/contracts/import.ts';
import { InvalidRequest } from '../../platform/errors.ts';
import { listAntennas, listReceivers } from '../station/station.read-model.ts';

/** Refuses a mapping that names receivers or antennas which the station does not have, by the field. */
export async function refuseUnknownIds(
  manager: EntityManager,
  stationId: number,
  mapping: ImportMapping,
): Promise<void> {
  const [receivers, antennas] = await Promise.all([
    listReceivers(manager, stationId),
    mapping.kind === 'dwells' ? listAntennas(manager, stationId) : [],
  ]);
  const isReceiver = (id: number) => receivers.some((each) => each.id === id);
  const isAntenna = (id: number) => antennas.some((each) => each.id === id);
  const errors = [
    ...(mapping.fixedReceiverId === undefined || isReceiver(mapping.fixedReceiverId)
      ? []
      : [{ path: 'body.mapping.fixedReceiverId', message: 'The station has no such receiver.' }]),
    ...Object.entries(mapping.receiverNames)
      .filter(([, id]) => !isReceiver(id))
      .map(([name]) => ({
        path: `body.mapping.receiverNames.${name}`,
        message: `The station does not have the receiver chosen for "${name}".`,
      })),
    ...Object.entries(mapping.kind === 'dwells' ? mapping.antennaNames : {})
      .filter(([, id]) => !isAntenna(id))
      .map(([name]) => ({
        path: `body.mapping.antennaNames.${name}`,
        message: `The station does not have the antenna chosen for "${name}".`,
      })),
  ];
  if (errors.length > 0) throw new InvalidRequest('Some fields have to change.', errors);
}
