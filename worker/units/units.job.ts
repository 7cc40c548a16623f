import { Station } from '../../server/database/entities/station.ts';
import { findMissingNights } from '../../server/database/missing-nights.ts';
import { inTransaction } from '../../server/database/transaction.ts';
import { parseRulesKey, rulesKey } from '../../shared/pairing/index.ts';
import { nightIndexOfDate } from '../../shared/radio/night.ts';
import type { JobHandler } from '../jobs/job-handler.ts';
import { standingRules } from './dirty-nights.ts';
import { lockNight, makeNight } from './night-maker.ts';

/** Makes the nights that exist under the standing rules also under other rules; repeats nothing that is made. */
export const runUnitsJob: JobHandler<'units'> = async ({ job, dataSource, signal, progress, assertOurs }) => {
  const { stationId, payload } = job;
  const rules = parseRulesKey(payload.rulesKey);
  const station = await dataSource.manager.findOneByOrFail(Station, { id: stationId });
  const missing = await findMissingNights(dataSource.manager, {
    stationId,
    standingKey: rulesKey(standingRules(station)),
    rulesKey: payload.rulesKey,
    ...{ fromNight: null, toNight: null, tonight: null },
  });
  progress(0, missing.length);
  for (const [done, night] of missing.entries()) {
    signal.throwIfAborted();
    const index = nightIndexOfDate(night);
    await inTransaction(dataSource, async (manager) => {
      await assertOurs(manager);
      await lockNight(manager, stationId, index);
      await makeNight(manager, station, index, rules, Date.now());
    });
    progress(done + 1, missing.length);
  }
};
