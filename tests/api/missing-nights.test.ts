import type { DataSource } from 'typeorm';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { markDirty } from '../../server/database/dirty-blocks.ts';
import { Station } from '../../server/database/entities/station.ts';
import { findMissingNights } from '../../server/database/missing-nights.ts';
import { rulesKey, type PairingRules } from '../../shared/pairing/index.ts';
import { nightIndexOfDate, nightStartMs } from '../../shared/radio/night.ts';
import { makeAllDirtyNights, standingRules } from '../../worker/units/dirty-nights.ts';
import { makeNight } from '../../worker/units/night-maker.ts';
import { inTransaction } from '../../server/database/transaction.ts';
import { createTestDatabase, type TestDatabase } from '../helpers/database.ts';
import { storeSampleStation } from '../helpers/sample-station.ts';

/** Five other sets of rules: two more than follow every change. */
const guards = [5, 10, 30, 40, 50];

let database: TestDatabase;
let dataSource: DataSource;
let stationId: number;
let station: Station;
let nights: string[];
let lastNight: string;

beforeAll(async () => {
  database = await createTestDatabase();
  dataSource = await connectDataSource(createDataSource({ url: database.url, poolSize: 4 }));
  ({ stationId } = await storeSampleStation(dataSource, 'swap'));
  station = await dataSource.getRepository(Station).findOneByOrFail({ id: stationId });
  const made: { night: string }[] = await dataSource.query(
    'SELECT night FROM unit_night WHERE station_id = $1 ORDER BY night',
    [stationId],
  );
  nights = made.map(({ night }) => night);
  lastNight = nights.at(-1)!;
  for (const guardSeconds of guards) {
    for (const night of nights) {
      await inTransaction(dataSource, (manager) =>
        makeNight(manager, station, nightIndexOfDate(night), rulesOf(guardSeconds), Date.now()),
      );
    }
  }
});
afterAll(async () => {
  await dataSource.destroy();
  await database.drop();
});

const rulesOf = (guardSeconds: number): PairingRules => ({ ...standingRules(station), guardSeconds });
const missing = (guardSeconds: number, tonight: string | null) =>
  findMissingNights(dataSource.manager, {
    stationId,
    standingKey: rulesKey(standingRules(station)),
    rulesKey: rulesKey(rulesOf(guardSeconds)),
    ...{ fromNight: null, toNight: null, tonight },
  });

async function change(night: string, nowMs: number): Promise<void> {
  const at = new Date(nightStartMs(nightIndexOfDate(night), station.longitudeDeg) + 8 * 3_600_000);
  await markDirty(dataSource.manager, stationId, at, at);
  await makeAllDirtyNights(dataSource, nowMs);
}

describe('nights under other rules', () => {
  const during = () => nightStartMs(nightIndexOfDate(lastNight), station.longitudeDeg) + 10 * 3_600_000;
  const after = () => during() + 24 * 3_600_000;

  it('are all there when each was made', async () => {
    for (const guard of guards) expect(await missing(guard, null)).toEqual([]);
    expect(await missing(15, null)).toEqual([...nights].reverse());
    // Nothing was ever made under these rules: tonight counts too.
    expect(await missing(15, lastNight)).toEqual([...nights].reverse());
  });

  it('are not lost to live spots of the present night, and count as old once it is over', async () => {
    await change(lastNight, during());
    for (const guard of guards) expect(await missing(guard, lastNight)).toEqual([]);
    // The three asked for last have followed; the others wait for somebody to ask.
    expect(await Promise.all(guards.map((guard) => missing(guard, null)))).toEqual([
      [lastNight],
      [lastNight],
      [],
      [],
      [],
    ]);
  });

  it('are made again on demand after an earlier night has changed', async () => {
    await change(nights[0]!, after());
    expect(await missing(guards[0]!, null)).toEqual([lastNight, nights[0]]);
    expect(await missing(guards[4]!, null)).toEqual([]);
  });
});
