import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { undoImport, type ImportRecord } from '../../shared/contracts/import.ts';
import type { JobRunner } from '../../worker/jobs/job-runner.ts';
import { startTestApi, type TestApi } from '../helpers/api.ts';
import {
  insertImportStation,
  madeUpHeader,
  madeUpRow,
  makeImportTools,
  startJobRunner,
  type ImportStation,
} from '../helpers/imports.ts';

/** A season's file with everything that goes wrong in files, through the real upload, job and database. */
const goodRows = 150_000;
const repeatedRows = 1_000;
/** Ten kinds, fifty of each: [what stands in the file, the field, a piece of the reason]. */
const brokenKinds: readonly ((n: number) => [line: string, field: string | null, reason: RegExp])[] = [
  (n) => [`2026-02-31T18:00:${pad(n)}Z,EI7QSA,EA8QSH,1824.5,CW,21,22`, 'time', /February 2026 has 28 days/],
  (n) => [`1900-01-05T18:00:${pad(n)}Z,EI7QSA,EA8QSH,1824.5,CW,21,22`, 'time', /before the year 2000/],
  (n) => [`2099-01-05T18:00:${pad(n)}Z,EI7QSA,EA8QSH,1824.5,CW,21,22`, 'time', /in the future/],
  (n) => [`yesterday ${n},EI7QSA,EA8QSH,1824.5,CW,21,22`, 'time', /not in ISO form, such as/],
  (n) => [
    `2026-01-05T18:00:${pad(n)}Z,EI7QSZ,EA8QSH,1824.5,CW,21,22`,
    'receiver',
    /no receiver of the station/,
  ],
  (n) => [`2026-01-05T18:00:${pad(n)}Z,EI7QSA,HELLO,1824.5,CW,21,22`, 'call', /not a call sign/],
  (n) => [`2026-01-05T18:00:${pad(n)}Z,EI7QSA,EA8QSH,9999.5,CW,21,22`, 'freq', /no amateur band/],
  (n) => [`2026-01-05T18:00:${pad(n)}Z,EI7QSA,EA8QSH,1824.5,CW,21.5,22`, 'snr', /not a whole number of dB/],
  (n) => [`2026-01-05T18:00:${pad(n)}Z,EI7QSA,EA8QSH,1824.5,CW`, null, /columns" instead of 7/],
  (n) => [
    `2026-01-05T18:00:${pad(n)}Z,EI7QSA,"EA8QSH,1824.5,CW,21,22`,
    null,
    /quote is opened and not closed/,
  ],
];
const pad = (n: number) => String(n).padStart(2, '0');
const ofEachKind = 50;

interface Made {
  file: Buffer;
  /** By line of the file. */
  broken: Map<number, { raw: string; field: string | null; reason: RegExp }>;
}

function makeFile(): Made {
  const lines = [madeUpHeader];
  const broken: Made['broken'] = new Map();
  const every = Math.floor(goodRows / (brokenKinds.length * ofEachKind));
  let made = 0;
  for (let n = 0; n < goodRows; n++) {
    lines.push(madeUpRow(n));
    if (n % every === 0 && made < brokenKinds.length * ofEachKind) {
      const [raw, field, reason] = brokenKinds[made % brokenKinds.length]!(
        Math.floor(made / brokenKinds.length),
      );
      lines.push(raw);
      broken.set(lines.length, { raw, field, reason });
      made++;
    }
  }
  // A block that stands in the file twice, as after a skimmer's restart.
  for (let n = 0; n < repeatedRows; n++) lines.push(madeUpRow(70_000 + n));
  return { file: Buffer.from(`\ufeff${lines.join('\r\n')}\r\n`), broken };
}

let api: TestApi;
let runner: JobRunner;
let station: ImportStation;
let tools: ReturnType<typeof makeImportTools>;
const { file, broken } = makeFile();
let first: ImportRecord;

beforeAll(async () => {
  api = await startTestApi();
  runner = startJobRunner(api.dataSource);
  station = await insertImportStation(api);
  tools = makeImportTools(api, station);
  first = await tools.run('spots', file);
});
afterAll(async () => {
  await runner.stop();
  await api.close();
});

async function countSpots(importId: number): Promise<{ spots: number; calls: number; snr: number }> {
  const rows = await api.dataSource.query(
    `SELECT count(*) AS spots, count(DISTINCT call_id) AS calls, sum(snr_db) AS snr FROM spot
     WHERE station_id = $1 AND import_id = $2`,
    [station.stationId, importId],
  );
  return rows[0];
}

describe('a file with a mark, CRLF, broken rows and a repeated block', () => {
  it('stores every good row once and counts the rest', async () => {
    expect(first.error).toBeNull();
    expect(first).toMatchObject({
      state: 'done',
      rowsRead: goodRows + broken.size + repeatedRows,
      rowsStored: goodRows,
      rowsDoubled: repeatedRows,
      rowsRefused: 500,
      rowsSkipped: 0,
      bytesDone: file.length,
      sizeBytes: file.length,
      firstAt: '2026-01-05T16:00:00.000Z',
      lastAt: new Date(Date.UTC(2026, 0, 5, 16) + (goodRows - 1) * 1000).toISOString(),
    });
    // Summed by hand from the rule of the rows: 5 + (n mod 40) over all n.
    const snr = (goodRows / 40) * (40 * 5 + (39 * 40) / 2);
    expect(await countSpots(first.id)).toEqual({ spots: goodRows, calls: 260, snr });
  });

  it('keeps each broken row with its line, its field and the reason', async () => {
    const { items, reasons } = await tools.refusals(first.id);
    expect(items).toHaveLength(500);
    for (const refusal of items) {
      const made = broken.get(refusal.lineNo);
      expect(made, `line ${refusal.lineNo}: ${refusal.reason}`).not.toBeUndefined();
      expect(refusal.raw).toBe(made!.raw);
      expect(refusal.field).toBe(made!.field);
      expect(refusal.reason).toMatch(made!.reason);
    }
    expect(reasons.map(({ lines }) => lines)).toEqual(Array(10).fill(50));
  });

  it('adds nothing when it is sent again, and says that it is the same file', async () => {
    const second = await tools.run('spots', file);
    expect(second).toMatchObject({
      state: 'done',
      rowsStored: 0,
      rowsDoubled: goodRows + repeatedRows,
      rowsRefused: 500,
      sameAsImportId: first.id,
      sha256: first.sha256,
      firstAt: null,
    });
    expect(await countSpots(first.id)).toMatchObject({ spots: goodRows });
  });

  it('is undone to the row: what others stored between its rows stays', async () => {
    // Rows of another file, between and on the seconds of this one.
    const others = Array.from({ length: 500 }, (_, n) => madeUpRow(n * 7).replace(/,CW,/, '9,CW,'));
    const other = await tools.run('spots', [madeUpHeader, ...others].join('\n'));
    expect(other.rowsStored).toBe(500);
    await api.dataSource.query('DELETE FROM dirty_block WHERE station_id = $1', [station.stationId]);

    await tools.ask(undoImport, { importId: first.id });
    const undone = await tools.until(first.id, ({ state }) => state === 'undone');
    expect(undone).toMatchObject({ rowsStored: goodRows, rowsUndone: goodRows, rowsRefused: 500 });
    expect(await countSpots(first.id)).toMatchObject({ spots: 0 });
    expect(await countSpots(other.id)).toMatchObject({ spots: 500 });
    expect((await tools.refusals(first.id)).items).toHaveLength(500);
    // 150,000 seconds from 16:00 reach into 42 hours, and a match into the hour before.
    const dirty = await api.dataSource.query(
      'SELECT min(starts_at) AS first, max(starts_at) AS last, count(*) AS hours FROM dirty_block WHERE station_id = $1',
      [station.stationId],
    );
    expect(dirty).toEqual([
      { first: new Date('2026-01-05T15:00:00Z'), last: new Date('2026-01-07T09:00:00Z'), hours: 43 },
    ]);
  });

  it('can be read again after it was undone', async () => {
    await tools.start(first.id, first.mapping!);
    const again = await tools.until(first.id, ({ state }) => state === 'done');
    expect(again).toMatchObject({ rowsStored: goodRows, rowsUndone: 0, rowsRefused: 500 });
  });
});
