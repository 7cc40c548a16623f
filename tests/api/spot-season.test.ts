import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { countSpots } from '../../shared/contracts/spot.ts';
import { scanStatement } from '../../server/features/spots/spot-scan.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
import { Membership } from '../../server/database/entities/membership.ts';
import { insertLogStation, insertSpots } from '../helpers/switch-log-rows.ts';

let api: TestApi;
let person: { token: string; userId: string };
beforeAll(async () => {
  api = await startTestApi();
  person = await api.addPerson((await insertLogStation(api.dataSource)).stationId, 'contester');
});
afterAll(() => api.close());

/** A station whose first receiver heard one spot at each of the given times of 2026-11-30. */
async function makeStation(clocks: string[]) {
  const station = await insertLogStation(api.dataSource);
  const { stationId, receiverId } = station;
  await api.dataSource
    .getRepository(Membership)
    .save({ stationId, userId: person.userId, role: 'contester' });
  await insertSpots(
    api.dataSource,
    stationId,
    clocks.map((clock) => ({ receiverId, timeMs: Date.parse(`2026-11-30T${clock}Z`) })),
  );
  return station;
}

describe('reading a range of many months', () => {
  interface Plan {
    'Node Type': string;
    'Relation Name'?: string;
    Plans?: Plan[];
  }
  const nodes = (plan: Plan): Plan[] => [plan, ...(plan.Plans ?? []).flatMap(nodes)];

  it('walks the index backward through the months of the range only, without scan or sort', async () => {
    const { stationId, receiverId } = await makeStation(['18:00:00']);
    const [month, later] = [Date.UTC(2025, 9), Date.UTC(2026, 2)];
    await api.dataSource.query('SELECT ensure_spot_partitions($1, $2)', [new Date(month), new Date(later)]);
    await api.dataSource.query(
      `INSERT INTO spot (station_id, heard_at, heard_ms, receiver_id, call_id, freq_100hz, import_id, band_m, snr_db, mode, uncertainty_s)
       SELECT $1, $3::timestamptz + n * interval '10 minutes', 0, $2, (SELECT min(id) FROM call_sign), 18100, 0, 160, 10, 1, 0
       FROM generate_series(0, 21000) AS n`,
      [stationId, receiverId, new Date(month)],
    );
    await api.dataSource.query('ANALYZE spot');
    const explain = async (fromMs: number, toMs: number, limit: number) => {
      const below = { second: toMs / 1000, receiverId: 0, callId: 0, freq100Hz: 0 };
      const { sql, values } = scanStatement(stationId, { fromMs, toMs }, fromMs, below, limit);
      const [row] = (await api.dataSource.query(`EXPLAIN (FORMAT JSON) ${sql}`, values)) as {
        'QUERY PLAN': { Plan: Plan }[];
      }[];
      return nodes(row!['QUERY PLAN'][0]!.Plan);
    };
    const december = await explain(Date.UTC(2025, 11, 5), Date.UTC(2025, 11, 20), 100);
    expect(december.map((node) => node['Relation Name']).filter(Boolean)).toEqual(['spot_2025_12']);
    const season = await explain(month, later, 100);
    expect(season.filter((node) => node['Relation Name'])).toHaveLength(6);
    for (const node of [...december, ...season]) {
      expect(['Limit', 'Append', 'Index Scan']).toContain(node['Node Type']);
    }
  });

  it('counts nights from what has been made, and counts itself only what has changed since', async () => {
    // Made under older rules too; the newest count of a night is the one that holds.
    const { stationId } = await makeStation(
      // Solar noon at 9 degrees west is 12:36 UTC: the first of the two belongs to the night before.
      ['12:35:59', '12:36:00', '23:00:00'],
    );
    const summary = async () =>
      (await api.call(countSpots, { params: { stationId }, token: person.token })).body;
    const insertNight = (night: string, key: string, spots: number, age: string) =>
      api.dataSource.query(
        `INSERT INTO unit_night (station_id, rules_key, night, spots, tally, made_at) VALUES ($1, $2, $3, $4, '{}', now() - $5::interval)`,
        [stationId, key, night, spots, age],
      );
    await insertNight('2026-11-28', 'b15.w30.f3.g20', 41, '1 hour');
    await insertNight('2026-11-28', 'b15.w30.f3.g30', 40, '1 day');
    await insertNight('2026-11-30', 'b15.w30.f3.g20', 1, '1 hour');
    const extent = { firstAt: '2026-11-30T12:35:59.000Z', lastAt: '2026-11-30T23:00:00.000Z' };
    expect(await summary()).toEqual({
      ...extent,
      nights: [
        { night: '2026-11-28', spots: 41 },
        { night: '2026-11-30', spots: 1 },
      ],
      total: 42,
    });
    // Marked in the hour in which one night ends and the next begins: both are counted.
    await api.dataSource.query(`INSERT INTO dirty_block (station_id, starts_at) VALUES ($1, $2)`, [
      stationId,
      '2026-11-30T12:00:00Z',
    ]);
    expect(await summary()).toEqual({
      ...extent,
      nights: [
        { night: '2026-11-28', spots: 41 },
        { night: '2026-11-29', spots: 1 },
        { night: '2026-11-30', spots: 2 },
      ],
      total: 44,
    });
  });

  it('says that a station without spots has none', async () => {
    const { stationId } = await makeStation([]);
    expect((await api.call(countSpots, { params: { stationId }, token: person.token })).body).toEqual({
      ...{ nights: [], total: 0, firstAt: null, lastAt: null },
    });
  });
});
