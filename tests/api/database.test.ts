import type { DataSource, QueryRunner } from 'typeorm';
import { afterAll, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { AuditEntry } from '../../server/database/entities/audit-entry.ts';
import { CallSign } from '../../server/database/entities/call-sign.ts';
import { Dwell } from '../../server/database/entities/dwell.ts';
import { FeedHealth } from '../../server/database/entities/feed-health.ts';
import { Feed } from '../../server/database/entities/feed.ts';
import { Spot } from '../../server/database/entities/spot.ts';
import { Station } from '../../server/database/entities/station.ts';
import {
  isExclusionViolation,
  isForeignKeyViolation,
  isUniqueViolation,
} from '../../server/database/transaction.ts';
import type { TestDatabase } from '../helpers/database.ts';
import { createTestDatabase } from '../helpers/database.ts';
import { insertStation, type StationRows } from '../helpers/station-rows.ts';

let database: TestDatabase;
let dataSource: DataSource;
let own: StationRows;
let foreign: StationRows;

beforeAll(async () => {
  database = await createTestDatabase();
  dataSource = await connectDataSource(createDataSource({ url: database.url }));
});

afterAll(async () => {
  await dataSource.destroy();
  await database.drop();
});

beforeEach(async () => {
  own = await insertStation(dataSource);
  foreign = await insertStation(dataSource);
});

function dwell(from: string, to: string | null, change: Partial<Dwell> = {}): Partial<Dwell> {
  return {
    stationId: own.stationId,
    receiverId: own.receiverId,
    antennaId: own.antennaIds[0],
    startsAt: new Date(from),
    endsAt: to === null ? null : new Date(to),
    source: 'hand',
    ...change,
  };
}

/** What the work was refused with; fails the test when it was not. */
async function refusalOf(work: Promise<unknown>): Promise<unknown> {
  return work.then(
    () => expect.fail('It was accepted.'),
    (error: unknown) => error,
  );
}

async function begin(): Promise<QueryRunner> {
  const queryRunner = dataSource.createQueryRunner();
  await queryRunner.connect();
  await queryRunner.startTransaction();
  return queryRunner;
}

/** Returns as soon as some connection of this database waits for a lock. */
async function someoneWaits(): Promise<void> {
  for (;;) {
    const [row]: { waiting: number }[] = await dataSource.query(
      `SELECT count(*) AS waiting FROM pg_stat_activity WHERE datname = current_database() AND wait_event_type = 'Lock'`,
    );
    if (row!.waiting > 0) return;
  }
}

describe('the switch log', () => {
  test('takes dwells that follow each other without a gap', async () => {
    const dwells = dataSource.getRepository(Dwell);
    await dwells.insert(dwell('2026-01-10T18:00:00Z', '2026-01-10T19:00:00Z'));
    await dwells.insert(dwell('2026-01-10T19:00:00Z', null, { antennaId: own.antennaIds[1] }));
    expect(await dwells.countBy({ stationId: own.stationId })).toBe(2);
  });

  test('refuses a dwell that starts while one is still open', async () => {
    const dwells = dataSource.getRepository(Dwell);
    await dwells.insert(dwell('2026-01-10T18:00:00Z', null));
    const later = dwell('2026-01-12T18:00:00Z', '2026-01-12T19:00:00Z', { antennaId: own.antennaIds[1] });
    const refusal = await refusalOf(dwells.insert(later));
    expect(isExclusionViolation(refusal, 'dwell_no_overlap')).toBe(true);
    expect(isUniqueViolation(refusal)).toBe(false);
  });

  test('refuses the second of two overlapping dwells written by simultaneous transactions', async () => {
    const first = await begin();
    const second = await begin();
    await first.manager.insert(Dwell, dwell('2026-01-10T18:00:00Z', '2026-01-10T19:00:00Z'));
    const refusal = refusalOf(
      second.manager.insert(
        Dwell,
        dwell('2026-01-10T18:59:59Z', '2026-01-10T20:00:00Z', { antennaId: own.antennaIds[1] }),
      ),
    );
    await someoneWaits();
    await first.commitTransaction();
    expect(isExclusionViolation(await refusal, 'dwell_no_overlap')).toBe(true);
    await second.rollbackTransaction();
    await Promise.all([first.release(), second.release()]);
    const stored = await dataSource.getRepository(Dwell).findBy({ stationId: own.stationId });
    expect(stored.map(({ antennaId }) => antennaId)).toEqual([own.antennaIds[0]]);
  });

  test('lets two stations use the same hour', async () => {
    const dwells = dataSource.getRepository(Dwell);
    await dwells.insert(dwell('2026-01-10T18:00:00Z', null));
    await dwells.insert(
      dwell('2026-01-10T18:00:00Z', null, {
        stationId: foreign.stationId,
        receiverId: foreign.receiverId,
        antennaId: foreign.antennaIds[0],
      }),
    );
    expect(await dwells.countBy({ stationId: foreign.stationId })).toBe(1);
  });

  test('refuses a dwell that ends when it starts', async () => {
    const refusal = await refusalOf(
      dataSource.getRepository(Dwell).insert(dwell('2026-01-10T18:00:00Z', '2026-01-10T18:00:00Z')),
    );
    expect(refusal).toMatchObject({ driverError: { code: '23514', constraint: 'dwell_order' } });
  });

  test("refuses another station's receiver", async () => {
    const refusal = await refusalOf(
      dataSource
        .getRepository(Dwell)
        .insert(dwell('2026-01-10T18:00:00Z', null, { receiverId: foreign.receiverId })),
    );
    expect(isForeignKeyViolation(refusal, 'dwell_station_id_receiver_id_fkey')).toBe(true);
  });

  test("refuses another station's antenna", async () => {
    const refusal = await refusalOf(
      dataSource
        .getRepository(Dwell)
        .insert(dwell('2026-01-10T18:00:00Z', null, { antennaId: foreign.antennaIds[0] })),
    );
    expect(isForeignKeyViolation(refusal, 'dwell_station_id_antenna_id_fkey')).toBe(true);
  });

  test('refuses to lose an antenna that it names', async () => {
    await dataSource.getRepository(Dwell).insert(dwell('2026-01-10T18:00:00Z', null));
    const refusal = await refusalOf(
      dataSource.query('DELETE FROM antenna WHERE station_id = $1 AND id = $2', [
        own.stationId,
        own.antennaIds[0],
      ]),
    );
    expect(isForeignKeyViolation(refusal)).toBe(true);
  });
});

test("a feed's health cannot be written under another station", async () => {
  const feed = await dataSource.getRepository(Feed).save({
    stationId: foreign.stationId,
    name: 'Village hall',
    host: '127.0.0.1',
    port: 7300,
    loginCall: 'EI7QSB',
  });
  const refusal = await refusalOf(
    dataSource.getRepository(FeedHealth).insert({
      stationId: own.stationId,
      feedId: feed.id,
      state: 'connecting',
    }),
  );
  expect(isForeignKeyViolation(refusal, 'feed_health_station_id_feed_id_fkey')).toBe(true);
});

describe('the months of spots', () => {
  const ensure = 'SELECT ensure_spot_partitions($1, $2) AS made';

  async function spot(heardAt: string, change: Partial<Spot> = {}): Promise<Partial<Spot>> {
    const calls = dataSource.getRepository(CallSign);
    const known = await calls.findOneBy({ call: 'EA8QSH' });
    const { id } = known ?? (await calls.save({ call: 'EA8QSH' }));
    return {
      heardAt: new Date(heardAt),
      heardMs: 250,
      stationId: own.stationId,
      receiverId: own.receiverId,
      callId: id,
      freq100hz: 18_215,
      importId: 0,
      bandM: 160,
      snrDb: 12,
      speedWpm: 24,
      mode: 1,
      uncertaintyS: 1,
      feedMinute: 1080,
      ...change,
    };
  }

  test('are made once by two connections that ask at the same instant', async () => {
    const first = await begin();
    const second = await begin();
    const range = ['2021-11-30T23:59:59Z', '2022-02-01T00:00:00Z'];
    expect(await first.query(ensure, range)).toEqual([{ made: 4 }]);
    const madeBySecond = second.query(ensure, range);
    await someoneWaits();
    await first.commitTransaction();
    expect(await madeBySecond).toEqual([{ made: 0 }]);
    await second.commitTransaction();
    await Promise.all([first.release(), second.release()]);
  });

  test('are made once by eight connections that all ask for a year', async () => {
    const answers: { made: number }[][] = await Promise.all(
      Array.from({ length: 8 }, () =>
        dataSource.query(ensure, ['2018-01-01T00:00:00Z', '2018-12-31T23:59:59Z']),
      ),
    );
    expect(answers.reduce((sum, [answer]) => sum + answer!.made, 0)).toBe(12);
  });

  test('are made while others read and write spots in open transactions', async () => {
    await dataSource.query(ensure, ['2023-01-01T00:00:00Z', '2023-01-01T00:00:00Z']);
    const reader = await begin();
    const writer = await begin();
    await reader.manager.countBy(Spot, { stationId: own.stationId });
    await writer.manager.insert(Spot, await spot('2023-01-05T18:00:00Z'));
    const [answer] = await dataSource.query(ensure, ['2023-02-01T00:00:00Z', '2023-02-01T00:00:00Z']);
    expect(answer).toEqual({ made: 1 });
    await writer.commitTransaction();
    await reader.rollbackTransaction();
    await Promise.all([reader.release(), writer.release()]);
  });

  test('begin and end at midnight UTC', async () => {
    await dataSource.query(ensure, ['2024-02-29T12:00:00Z', '2024-03-01T12:00:00Z']);
    const spots = dataSource.getRepository(Spot);
    await spots.insert([await spot('2024-02-29T23:59:59Z'), await spot('2024-03-01T00:00:00Z')]);
    const places = await dataSource.query(
      'SELECT tableoid::regclass::text AS place FROM spot WHERE station_id = $1 ORDER BY heard_at',
      [own.stationId],
    );
    expect(places).toEqual([{ place: 'spot_2024_02' }, { place: 'spot_2024_03' }]);
  });

  test('refuse a spot of a month that was not made', async () => {
    const refusal = await refusalOf(
      dataSource.getRepository(Spot).insert(await spot('1999-01-01T00:00:00Z')),
    );
    expect(refusal).toMatchObject({ message: expect.stringContaining('no partition of relation "spot"') });
  });

  test('refuse a replayed spot, whatever its milliseconds, strength and origin', async () => {
    await dataSource.query(ensure, ['2026-01-10T00:00:00Z', '2026-01-10T00:00:00Z']);
    const spots = dataSource.getRepository(Spot);
    await spots.insert(await spot('2026-01-10T18:00:00Z'));
    const replayed = await spot('2026-01-10T18:00:00Z', { heardMs: 900, snrDb: 15, importId: 7 });
    expect(isUniqueViolation(await refusalOf(spots.insert(replayed)))).toBe(true);
    await spots.createQueryBuilder().insert().values(replayed).orIgnore().execute();
    const stored = await spots.findBy({ stationId: own.stationId });
    expect(stored.map(({ snrDb, heardMs }) => [snrDb, heardMs])).toEqual([[12, 250]]);
  });

  test('keep spots apart that differ in second, frequency, receiver or station', async () => {
    await dataSource.query(ensure, ['2026-01-10T00:00:00Z', '2026-01-10T00:00:00Z']);
    const spots = dataSource.getRepository(Spot);
    await spots.insert([
      await spot('2026-01-10T18:00:00Z'),
      await spot('2026-01-10T18:00:01Z'),
      await spot('2026-01-10T18:00:00Z', { freq100hz: 18_216 }),
      await spot('2026-01-10T18:00:00Z', { receiverId: own.receiverId + 1000 }),
      await spot('2026-01-10T18:00:00Z', { stationId: foreign.stationId }),
    ]);
    expect(await spots.countBy({ stationId: own.stationId })).toBe(4);
    expect(await spots.countBy({ stationId: foreign.stationId })).toBe(1);
  });

  test("show a spot's antenna from the first millisecond of a dwell to the last", async () => {
    await dataSource.query(ensure, ['2026-01-10T00:00:00Z', '2026-01-10T00:00:00Z']);
    await dataSource
      .getRepository(Dwell)
      .insert(dwell('2026-01-10T18:00:00.250Z', '2026-01-10T18:10:00.250Z'));
    const at = async (heardAt: string, heardMs: number) =>
      dataSource.getRepository(Spot).insert(await spot(heardAt, { heardMs }));
    await at('2026-01-10T17:59:59Z', 999);
    await at('2026-01-10T18:00:00Z', 250);
    await at('2026-01-10T18:09:59Z', 999);
    await at('2026-01-10T18:10:00Z', 250);
    const tagged: { antenna_id: number | null }[] = await dataSource.query(
      'SELECT antenna_id FROM tagged_spot WHERE station_id = $1 ORDER BY heard_at',
      [own.stationId],
    );
    const [antenna] = own.antennaIds;
    expect(tagged.map(({ antenna_id }) => antenna_id)).toEqual([null, antenna, antenna, null]);
  });
});

describe('the audit trail', () => {
  async function entry(): Promise<AuditEntry> {
    return dataSource.getRepository(AuditEntry).save({
      stationId: own.stationId,
      action: 'dwell.edit',
      target: '41',
      detail: { note: 'as it was' },
    });
  }

  test.each([
    ['a change of its words', `UPDATE audit_entry SET action = 'nothing' WHERE id = $1`],
    ['a move to another station', 'UPDATE audit_entry SET station_id = station_id + 1 WHERE id = $1'],
    ['a new number', 'UPDATE audit_entry SET id = DEFAULT WHERE id = $1'],
    [
      'a change that also takes its station away',
      `UPDATE audit_entry SET station_id = NULL, target = '' WHERE id = $1`,
    ],
    ['a deletion', 'DELETE FROM audit_entry WHERE id = $1'],
    ['being emptied', 'TRUNCATE audit_entry'],
  ])('refuses %s', async (_what, statement) => {
    const before = await entry();
    const refusal = await refusalOf(dataSource.query(statement, statement.includes('$1') ? [before.id] : []));
    expect(refusal).toMatchObject({ message: 'The audit trail is append-only.' });
    expect(await dataSource.getRepository(AuditEntry).findOneByOrFail({ id: before.id })).toEqual(before);
  });

  test('keeps the entries of a station that is deleted, without its number', async () => {
    const before = await entry();
    await dataSource.getRepository(Station).delete({ id: own.stationId });
    const after = await dataSource.getRepository(AuditEntry).findOneByOrFail({ id: before.id });
    expect(after).toEqual({ ...before, stationId: null });
  });
});
