import { inTransaction } from '../../server/database/transaction.ts';
import { publish } from '../../server/platform/notify.ts';
import type { JobHandler } from '../jobs/job-handler.ts';
import { recomputeBearings } from './bearing-store.ts';

const callsInStep = 5_000;

/**
 * Computes a station's bearings anew after a move or a correction: of every call in the dictionary, which
 * holds those that the station heard and costs a second for a hundred thousand. Nothing else follows from
 * it: a direction is looked up when a question is asked.
 */
export const runBearingsJob: JobHandler<'bearings'> = async ({
  job,
  dataSource,
  signal,
  progress,
  assertOurs,
  logger,
}) => {
  const counted: { calls: number }[] = await dataSource.query('SELECT count(*) AS calls FROM call_sign');
  const total = counted[0]!.calls;
  let done = 0;
  let unfit: string[] = [];
  for (let after: number | null = 0; after !== null;) {
    signal.throwIfAborted();
    const from: number = after;
    const step = await inTransaction(dataSource, async (manager) => {
      await assertOurs(manager);
      return recomputeBearings(manager, job.stationId, from, callsInStep);
    });
    after = step.lastCallId;
    done += step.calls;
    if (step.calls > 0) unfit = step.unfit;
    progress(done, Math.max(done, total));
  }
  if (unfit.length > 0) logger.warn({ reasons: unfit }, 'position corrections that cannot be used');
  await publish(dataSource.manager, job.stationId, { type: 'station' });
};
