import type { EntityManager } from 'typeorm';
import { eventChannel } from '../../shared/contracts/event.ts';
import type { StationEvent } from '../../shared/contracts/event.ts';

/** PostgreSQL refuses payloads of 8000 bytes and more. */
const payloadLimitBytes = 7900;

/**
 * Tells every server process that something changed. Inside a transaction the message leaves with the
 * commit, so nobody is told of what was rolled back. A message that is too long is cut to its type's
 * smallest form: listeners then read everything anew, which is slower but never wrong.
 */
export async function publish(manager: EntityManager, stationId: number, event: StationEvent): Promise<void> {
  let payload = JSON.stringify({ stationId, event });
  if (Buffer.byteLength(payload) > payloadLimitBytes) {
    payload = JSON.stringify({ stationId, event: { type: 'station' } satisfies StationEvent });
  }
  await manager.query('SELECT pg_notify($1, $2)', [eventChannel, payload]);
}

/** Wakes idle workers; the job table itself is the queue, so a lost wake-up costs only a poll interval. */
export const jobChannel = 'whichwire_job';
export async function wakeWorkers(manager: EntityManager): Promise<void> {
  await manager.query('SELECT pg_notify($1, $2)', [jobChannel, '']);
}
