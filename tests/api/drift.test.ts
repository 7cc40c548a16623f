import { beforeAll, describe, expect, test } from 'vitest';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { findDrift } from '../../server/database/drift.ts';
import { createTestDatabase } from '../helpers/database.ts';

async function findDriftAfter(...changes: string[]): Promise<string[]> {
  const database = await createTestDatabase();
  const dataSource = await connectDataSource(createDataSource({ url: database.url, poolSize: 2 }));
  try {
    for (const change of changes) await dataSource.query(change);
    return await findDrift(dataSource);
  } finally {
    await dataSource.destroy();
    await database.drop();
  }
}

test('the migrations build what the entities say', async () => {
  expect(await findDriftAfter()).toEqual([]);
});

/** Changes that no migration made, and what the check has to say of each. One after the other. */
const changes: [what: string, change: string, finding: RegExp][] = [
  ['a missing column', 'ALTER TABLE receiver DROP COLUMN notes', /ADD "notes" text/],
  ['a column no entity knows', 'ALTER TABLE station ADD colour text', /DROP COLUMN "colour"/],
  ['a changed type', 'ALTER TABLE unit_night ALTER spots TYPE bigint', /"unit_night".*"spots"/],
  [
    'a changed default',
    'ALTER TABLE station ALTER guard_seconds SET DEFAULT 9',
    /"guard_seconds" SET DEFAULT '20'/,
  ],
  ['a column that may be empty', 'ALTER TABLE trial ALTER notes DROP NOT NULL', /"notes" SET NOT NULL/],
  ['a missing table', 'DROP TABLE timed_run', /CREATE TABLE "timed_run"/],
  ['a table without an entity', 'CREATE TABLE stray (id integer)', /^Table stray has no entity\.$/],
  [
    'a missing foreign key',
    'ALTER TABLE trial DROP CONSTRAINT trial_created_by_fkey',
    /ADD CONSTRAINT "trial_created_by_fkey"/,
  ],
  [
    'a foreign key that no longer clears up',
    `ALTER TABLE job DROP CONSTRAINT job_created_by_fkey,
     ADD CONSTRAINT job_created_by_fkey FOREIGN KEY (created_by) REFERENCES app_user (id)`,
    /job_created_by_fkey.* in the database, .*ON DELETE SET NULL in the entity/,
  ],
  [
    'a foreign key without the station',
    `ALTER TABLE dwell DROP CONSTRAINT dwell_station_id_receiver_id_fkey;
     ALTER TABLE receiver ADD UNIQUE (id);
     ALTER TABLE dwell ADD CONSTRAINT dwell_station_id_receiver_id_fkey FOREIGN KEY (receiver_id) REFERENCES receiver (id)`,
    /dwell_station_id_receiver_id_fkey: FOREIGN KEY \(receiver_id\).* in the database/,
  ],
  [
    'a check of the same name that says something else',
    `ALTER TABLE feed DROP CONSTRAINT feed_port_check, ADD CONSTRAINT feed_port_check CHECK (port > 0)`,
    /^feed, constraint feed_port_check: CHECK \(\(port > 0\)\) in the database, CHECK \(\(\(port >= 1\)/,
  ],
  [
    'a generated column with another expression',
    `ALTER TABLE dwell DROP COLUMN during CASCADE;
     ALTER TABLE dwell ADD during tstzrange NOT NULL GENERATED ALWAYS AS (tstzrange(starts_at, ends_at, '[]')) STORED`,
    /"dwell" ADD "during" tstzrange GENERATED ALWAYS AS \(tstzrange\(starts_at, ends_at, '\[\)'::text\)\) STORED/,
  ],
  [
    'an exclusion that no longer keeps receivers apart',
    // The old one went with the column above.
    `ALTER TABLE dwell ADD CONSTRAINT dwell_no_overlap EXCLUDE USING gist (station_id WITH =, during WITH &&)`,
    /^dwell, constraint dwell_no_overlap: EXCLUDE USING gist \(station_id WITH =, during WITH &&\) in the database, .*receiver_id WITH =/,
  ],
  [
    'an index with its columns in another order',
    'DROP INDEX dwell_start; CREATE INDEX dwell_start ON dwell (starts_at, station_id)',
    /^dwell, index dwell_start: .*\(starts_at, station_id\) in the database, .*\(station_id, starts_at\) in the entity\.$/,
  ],
  ['a missing index on an expression', 'DROP INDEX antenna_name', /^Index antenna_name is missing\.$/],
  [
    'a column that the partitioned table lacks',
    'ALTER TABLE spot DROP COLUMN feed_minute',
    /^Column spot\.feed_minute: missing in the database, smallint in the entity\.$/,
  ],
  [
    'a changed type in the partitioned table',
    'ALTER TABLE spot ALTER import_id TYPE bigint',
    /^Column spot\.import_id: bigint not null in the database, integer not null in the entity\.$/,
  ],
  [
    'a partitioned table that takes doubles',
    'ALTER TABLE spot DROP CONSTRAINT spot_station_id_heard_at_receiver_id_call_id_freq_100hz_key',
    /^Index spot_station_id_heard_at_receiver_id_call_id_freq_100hz_key is missing\.$/,
  ],
];

describe('the drift check', () => {
  let drift: string[];

  beforeAll(async () => {
    drift = await findDriftAfter('DROP VIEW tagged_spot', ...changes.map(([, change]) => change));
  });

  test.each(changes)('finds %s', (_what, _change, finding) => {
    expect(drift).toContainEqual(expect.stringMatching(finding));
  });

  test('says nothing of tables that are as they should be', () => {
    expect(drift.filter((line) => /call_bearing|import_chunk|membership/.test(line))).toEqual([]);
  });
});
