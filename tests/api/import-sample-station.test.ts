import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { compare, comparisonAnswer } from '../../shared/contracts/comparison.ts';
import { undoImport, type ImportMapping } from '../../shared/contracts/import.ts';
import { Station } from '../../server/database/entities/station.ts';
import type { JobRunner } from '../../worker/jobs/job-runner.ts';
import { makeAllDirtyNights } from '../../worker/units/dirty-nights.ts';
import { startTestApi, type TestApi } from '../helpers/api.ts';
import { makeImportTools, startJobRunner } from '../helpers/imports.ts';

/**
 * Both data sets of the sample station, from their files through upload, guessed mapping and job, into an
 * empty station. The counts are those worked out in R (tests/reference/sample-station/README.md).
 */
const folder = fileURLToPath(new URL('../reference/sample-station/', import.meta.url));
const expected = JSON.parse(readFileSync(`${folder}expected.json`, 'utf8')) as Record<
  'swap' | 'alternate',
  { taggedSpots: number; guardedSpots: number; matches?: number; all: Worked; byBand: Record<string, Worked> }
>;
/** One comparison of ALPHA with BRAVO, worked in R 4.2.2 (data.table, sandwich, wilcox.test). */
interface Worked {
  units: number;
  clusters: number;
  stations: number;
  nights: number;
  estimate: number;
  se: number;
  lo: number;
  hi: number;
  offsets: number | number[];
  hl: number;
  meanClusters: number;
}
/** Lines of each file without its header, counted with `wc -l`. */
const fileRows = {
  swap: { dwells: 480, spots: 19_851 },
  alternate: { dwells: 480, spots: 6_422 },
};
const make = (guess: ImportMapping): ImportMapping =>
  guess.kind === 'dwells' ? { ...guess, unknownNames: 'make' } : guess;

let api: TestApi;
let runner: JobRunner;

beforeAll(async () => {
  api = await startTestApi();
  runner = startJobRunner(api.dataSource);
});
afterAll(async () => {
  await runner.stop();
  await api.close();
});

describe.each(['swap', 'alternate'] as const)('the sample station, %s', (set) => {
  let stationId: number;
  let tools: ReturnType<typeof makeImportTools>;
  let dwellImportId: number;
  let token: string;
  const rows = fileRows[set];

  beforeAll(async () => {
    const station = await api.dataSource.getRepository(Station).save({
      name: `Sample station, ${set}`,
      callSign: 'EI7QSB',
      locator: 'IO53',
      latitudeDeg: 53.5,
      longitudeDeg: -9,
      timeZone: 'Europe/Dublin',
      ituRegion: 1,
    });
    stationId = station.id;
    ({ token } = await api.addPerson(stationId, 'analyst'));
    tools = makeImportTools(api, { stationId, token });
  });

  async function antennaIds() {
    const rows: { name: string; id: number }[] = await api.dataSource.query(
      'SELECT name, id FROM antenna WHERE station_id = $1',
      [stationId],
    );
    return Object.fromEntries(rows.map(({ name, id }) => [name, id])) as Record<
      'ALPHA' | 'BRAVO' | 'CHARLIE',
      number
    >;
  }

  async function count(sql: string): Promise<unknown> {
    const [row] = await api.dataSource.query(`SELECT count(*) AS n FROM ${sql}`, [stationId]);
    return row.n;
  }

  it('makes receivers and antennas of the names in its switch log', async () => {
    const record = await tools.run('dwells', readFileSync(`${folder}${set}-dwells.csv`), make);
    dwellImportId = record.id;
    expect(record).toMatchObject({
      state: 'done',
      error: null,
      rowsRead: rows.dwells,
      rowsStored: rows.dwells,
      rowsRefused: 0,
    });
    const names = await api.dataSource.query(
      `SELECT (SELECT array_agg(call_sign ORDER BY call_sign) FROM receiver WHERE station_id = $1) AS receivers,
         (SELECT array_agg(name || ' ' || marker ORDER BY name) FROM antenna WHERE station_id = $1) AS antennas`,
      [stationId],
    );
    const receivers = { swap: ['EI7QSA', 'EI7QSC', 'EI7QSD'], alternate: ['EI7QSA'] }[set];
    expect(names).toEqual([{ receivers, antennas: ['ALPHA A', 'BRAVO B', 'CHARLIE C'] }]);
    expect(await count(`dwell_change WHERE station_id = $1 AND action = 'import'`)).toBe(rows.dwells);
    expect(await count(`(SELECT DISTINCT batch_id FROM dwell_change WHERE station_id = $1) AS b`)).toBe(1);
  });

  it('stores its spots, each in the dwell that the reference put it in', async () => {
    const record = await tools.run('spots', readFileSync(`${folder}${set}-spots.csv`));
    expect(record).toMatchObject({
      state: 'done',
      rowsStored: rows.spots,
      rowsDoubled: 0,
      rowsRefused: 0,
    });
    expect(await count('tagged_spot WHERE station_id = $1 AND dwell_id IS NOT NULL')).toBe(
      expected[set].taggedSpots,
    );
    expect(
      await count(`tagged_spot WHERE station_id = $1 AND heard_at < dwell_starts_at + interval '20 seconds'`),
    ).toBe(expected[set].guardedSpots);
  });

  it('answers ALPHA against BRAVO over HTTP as worked in R, all together and band by band', async () => {
    await makeAllDirtyNights(api.dataSource, Date.now());
    const { ALPHA, BRAVO } = await antennaIds();
    const questions: [number[], Worked][] = [
      [[], expected[set].all],
      ...Object.entries(expected[set].byBand).map(([band, worked]): [number[], Worked] => [
        [Number(band)],
        worked,
      ]),
    ];
    for (const [bandsMetres, worked] of questions) {
      const reply = await api.call(compare, {
        params: { stationId },
        token,
        body: { antennaA: ALPHA, antennaB: BRAVO, bandsMetres },
      });
      const answer = comparisonAnswer.parse(reply.body);
      const { units, clusters, stations, nights } = worked;
      expect(answer.counts).toMatchObject({ units, clusters, stations, nights });
      if (bandsMetres.length === 0 && set === 'swap')
        expect(answer.counts.matches).toBe(expected.swap.matches);
      expect(answer.estimate!.estimateDb).toBeCloseTo(worked.estimate, 6);
      expect(answer.estimate!.seDb).toBeCloseTo(worked.se, 6);
      expect(answer.estimate!.interval95Db[0]).toBeCloseTo(worked.lo, 6);
      expect(answer.estimate!.interval95Db[1]).toBeCloseTo(worked.hi, 6);
      expect(answer.rank!.clusterMeanDb).toBeCloseTo(worked.meanClusters, 6);
      expect(Math.abs(answer.rank!.hodgesLehmannDb - worked.hl)).toBeLessThanOrEqual(0.01);
      const offsets = [worked.offsets].flat();
      expect(answer.offsets).toHaveLength(offsets.length);
      answer.offsets.forEach(({ offsetDb }, k) => expect(offsetDb).toBeCloseTo(offsets[k]!, 6));
    }
  });

  if (set === 'swap')
    it('cannot separate ALPHA from CHARLIE, and names the cure', async () => {
      const { ALPHA, CHARLIE } = await antennaIds();
      const body = { antennaA: ALPHA, antennaB: CHARLIE };
      const answer = comparisonAnswer.parse(
        (await api.call(compare, { params: { stationId }, token, body })).body,
      );
      expect(answer.verdict.code).toBe('cannot be separated');
      expect(answer.estimate).toBeNull();
      expect(answer.verdict.cures[0]).toContain('Swap the two antennas for about 40 minutes');
    });

  it('counts a switch log that is there already as doubles', async () => {
    const record = await tools.run('dwells', readFileSync(`${folder}${set}-dwells.csv`), make);
    expect(record).toMatchObject({ rowsStored: 0, rowsDoubled: rows.dwells, rowsRefused: 0 });
    expect(record.sameAsImportId).toBe(dwellImportId);
  });

  it('loses its dwells again, with a history, when their import is undone', async () => {
    await tools.ask(undoImport, { importId: dwellImportId });
    const record = await tools.until(dwellImportId, ({ state }) => state === 'undone');
    expect(record.rowsUndone).toBe(rows.dwells);
    expect(await count('dwell WHERE station_id = $1')).toBe(0);
    expect(await count(`dwell_change WHERE station_id = $1 AND action = 'undo' AND after IS NULL`)).toBe(
      rows.dwells,
    );
    expect(await count('tagged_spot WHERE station_id = $1 AND dwell_id IS NOT NULL')).toBe(0);
    expect(await count('spot WHERE station_id = $1')).toBe(rows.spots);
  });
});
