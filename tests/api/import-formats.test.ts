import { gzipSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
  downloadImportRefusals,
  previewImport,
  undoImport,
  type ImportMapping,
  type ImportPreview,
  type SpotMapping,
} from '../../shared/contracts/import.ts';
import { createImportJob } from '../../worker/imports/import.job.ts';
import type { JobRunner } from '../../worker/jobs/job-runner.ts';
import { startTestApi, type TestApi } from '../helpers/api.ts';
import {
  insertImportStation,
  madeUpHeader,
  madeUpRow,
  makeImportTools,
  startJobRunner,
} from '../helpers/imports.ts';

/** Files as they come: packed, in other encodings, with other delimiters, as spot lines, damaged. */
let api: TestApi;
let runner: JobRunner;

beforeAll(async () => {
  api = await startTestApi();
  // A million in a station; here a number that a test reaches soon.
  runner = startJobRunner(api.dataSource, 'test worker', {
    import: createImportJob({ mostRefusals: 30_000, batchRows: 10_000 }),
  });
});
afterAll(async () => {
  await runner.stop();
  await api.close();
});

async function openStation() {
  const station = await insertImportStation(api);
  return { station, tools: makeImportTools(api, station) };
}

async function storedSpots(importId: number) {
  return api.dataSource.query(
    `SELECT to_char((heard_at + heard_ms * interval '1 millisecond') AT TIME ZONE 'UTC', 'YYYY-MM-DD HH24:MI:SS.MS') AS at,
       r.call_sign AS receiver, call, freq_100hz / 10.0 AS khz, band_m AS band, snr_db AS snr, uncertainty_s AS unsure
     FROM spot s JOIN call_sign c ON c.id = s.call_id
     JOIN receiver r ON r.station_id = s.station_id AND r.id = s.receiver_id
     WHERE import_id = $1 ORDER BY heard_at, call`,
    [importId],
  );
}

const made = (rows: number) =>
  [madeUpHeader, ...Array.from({ length: rows }, (_, n) => madeUpRow(n))].join('\n');
const asSpots = (change: Partial<SpotMapping>) => (guess: ImportMapping) =>
  ({ ...guess, ...change }) as ImportMapping;

describe('formats of imported files', () => {
  it('reads a gzip file as the plain one', async () => {
    const { tools } = await openStation();
    const record = await tools.run('spots', gzipSync(made(3000)));
    expect(record).toMatchObject({ state: 'done', rowsStored: 3000, rowsRefused: 0 });
    expect(record.bytesDone).toBe(record.sizeBytes);
    const plain = await tools.run('spots', made(3000));
    expect(plain).toMatchObject({ rowsStored: 0, rowsDoubled: 3000, sameAsImportId: null });
  });

  it('reads UTF-16 with semicolons, decimal commas, day-first dates and a preamble', async () => {
    const { tools } = await openStation();
    const text = [
      'Report of the skimmer in the shed',
      '',
      'Datum;Zeit;Date;UTC;RX;Call;MHz;dB',
      ';;31.01.2026;23:59:58;EI7QSA-#;EA8QSH;1,8245;21',
      ';;01.02.2026;00:00:02;EI7QSC-1-#;w1qrb/4;3,5021;-3',
    ].join('\r\n');
    for (const bytes of [
      Buffer.from(`\ufeff${text}`, 'utf16le'),
      Buffer.from(`\ufeff${text}`, 'utf16le').swap16(),
    ]) {
      const record = await tools.run('spots', bytes);
      expect(record).toMatchObject({ state: 'done', rowsRead: 2, rowsRefused: 0 });
      if (record.rowsStored === 0) continue;
      expect(record.mapping).toMatchObject({
        format: { encoding: 'utf-16le', delimiter: ';', skipLines: 2, decimalComma: true },
        freqUnit: 'MHz',
        time: { kind: 'pattern', pattern: 'dd.MM.yyyy HH:mm:ss' },
      });
      expect(await storedSpots(record.id)).toEqual([
        {
          at: '2026-01-31 23:59:58.000',
          receiver: 'EI7QSA',
          call: 'EA8QSH',
          khz: '1824.5000000000000000',
          band: 160,
          snr: 21,
          unsure: 0,
        },
        {
          at: '2026-02-01 00:00:02.000',
          receiver: 'EI7QSC',
          call: 'W1QRB/4',
          khz: '3502.1000000000000000',
          band: 80,
          snr: -3,
          unsure: 0,
        },
      ]);
    }
  });

  it('reads spot lines over midnight, to the minute', async () => {
    const { tools } = await openStation();
    const text = [
      'DX de EI7QSA-#:    1824.5  EA8QSH         CW    21 dB  22 WPM  CQ      2358Z',
      'DX de EI7QSA-#:    1824.5  EA8QSH         CW    23 dB  22 WPM  CQ      0001Z',
      'DX de EI7QSC-#:   3502.1 W1QRB CW 7 dB 2359Z',
      'DX de EI7QSZ-#:   3502.1 W1QRB CW 7 dB 0002Z',
      'Hello to all, this is no spot',
    ].join('\r\n');
    const record = await tools.run(
      'spots',
      text,
      asSpots({ firstDay: '2026-01-31', otherReceivers: 'skip' }),
    );
    expect(record).toMatchObject({ rowsRead: 5, rowsStored: 3, rowsSkipped: 1, rowsRefused: 1 });
    expect((await storedSpots(record.id)).map((spot: { at: string }) => spot.at)).toEqual([
      '2026-01-31 23:58:00.000',
      '2026-01-31 23:59:00.000',
      '2026-02-01 00:01:00.000',
    ]);
    const [firstSpot] = await storedSpots(record.id);
    expect(firstSpot.unsure).toBe(60);
    expect((await tools.refusals(record.id)).items).toEqual([
      expect.objectContaining({ lineNo: 5, field: null, raw: 'Hello to all, this is no spot' }),
    ]);
  });

  it('refuses the hour that a zone skips and the one that it has twice', async () => {
    const { tools } = await openStation();
    // Ireland 2026: forward at 01:00 UTC on 29 March, back at 01:00 UTC on 25 October (EU directive 2000/84/EC).
    const text = [
      'time,rx,call,khz,snr',
      '2026-03-29 00:59:59,EI7QSA,EA8QSH,1824.5,21',
      '2026-03-29 01:30:00,EI7QSA,EA8QSH,1824.5,21',
      '2026-03-29 02:00:00,EI7QSA,EA8QSH,1824.5,21',
      '2026-10-25 00:59:59,EI7QSA,EA8QSH,1824.5,21',
      '2026-10-25 01:30:00,EI7QSA,EA8QSH,1824.5,21',
      '2026-10-25 02:00:00,EI7QSA,EA8QSH,1824.5,21',
    ].join('\n');
    const zoned = asSpots({ time: { kind: 'iso', zone: 'Europe/Dublin' } });
    const record = await tools.run('spots', text, zoned);
    expect((await storedSpots(record.id)).map((spot: { at: string }) => spot.at)).toEqual([
      '2026-03-29 00:59:59.000',
      '2026-03-29 01:00:00.000',
      '2026-10-24 23:59:59.000',
      '2026-10-25 02:00:00.000',
    ]);
    const { items } = await tools.refusals(record.id);
    expect(
      items.map(({ lineNo, reason }) => [lineNo, /does not exist|came twice/.exec(reason)?.[0]]),
    ).toEqual([
      [3, 'does not exist'],
      [6, 'came twice'],
    ]);
  });

  it('gives back refused lines in a form that is corrected and sent again', async () => {
    const { station, tools } = await openStation();
    const text = [
      'utc;rx;call;khz;mode;snr_db;wpm',
      '2026-01-05T18:00:00Z;EI7QSA;EA8QSH;1824,5;CW;21;22',
      '2026-01-05T18:00:01Z;EI7QSA;"=HYPER;LINK";1824,5;CW;-7;22',
      '2026-01-05T18:00:02Z;EI7QSA;EA8QSH;1824,5;CW;+2,5;22',
    ].join('\n');
    const record = await tools.run('spots', text);
    expect(record).toMatchObject({ rowsStored: 1, rowsRefused: 2 });
    const csv = await api.call(downloadImportRefusals, {
      token: station.token,
      params: { stationId: station.stationId, importId: record.id },
    });
    expect(csv.headers.get('content-type')).toMatch(/^text\/csv/);
    const lines = csv.text.trimEnd().split('\r\n');
    expect(lines[0]).toBe('line,field,reason,utc,rx,call,khz,mode,snr_db,wpm');
    expect(lines[1]).toMatch(
      /^3,call,"The call sign .*",2026-01-05T18:00:01Z,EI7QSA,'=HYPER;LINK,"1824,5",CW,-7,22$/,
    );
    const corrected = csv.text.replace("'=HYPER;LINK", 'W1QRB').replace("'+2,5", '3');
    const again = await tools.run('spots', corrected);
    expect(again).toMatchObject({ rowsRead: 2, rowsStored: 2, rowsRefused: 0 });
    expect((await storedSpots(again.id)).map((spot: { snr: number }) => spot.snr)).toEqual([-7, 3]);
  });

  it('keeps what a damaged gzip file gave before its damage, and says where it ends', async () => {
    const { tools } = await openStation();
    const packed = gzipSync(made(40_000));
    const { id } = await tools.upload('spots', packed.subarray(0, packed.length - 1000));
    await tools.start(id, (await tools.preview(id)).guess);
    const record = await tools.until(id, ({ state }) => state === 'failed');
    expect(record.error).toMatch(/^The file is damaged: its gzip data ends too early/);
    expect(record.rowsStored).toBeGreaterThan(35_000);
    expect((await storedSpots(id)).length).toBe(record.rowsStored);
    await tools.ask(undoImport, { importId: id });
    const undone = await tools.until(id, ({ state }) => state === 'undone');
    expect(undone.rowsUndone).toBe(record.rowsStored);
  });

  it('refuses a file that unpacks without end', async () => {
    const { station, tools } = await openStation();
    const flood = gzipSync(Buffer.alloc(100 * 2 ** 20, `${'a,b'.padEnd(60_000)}\n`));
    const { id } = await tools.upload('spots', flood);
    await tools.start(id, {
      ...(await tools.preview(id)).guess,
      columns: { time: 1, call: 1, freq: 2, snr: 2 },
      fixedReceiverId: station.receivers.EI7QSA,
    } as SpotMapping);
    const record = await tools.until(id, ({ state }) => state === 'failed');
    expect(record.error).toMatch(/^The file unpacks to more than 200 times its size/);
  });

  it('stops when too many lines are refused, and keeps those it has', async () => {
    const { station, tools } = await openStation();
    const { id } = await tools.upload('spots', Buffer.alloc(4 * 100_000, 'a,b\n'));
    const mapping = { ...(await tools.preview(id)).guess, fixedReceiverId: station.receivers.EI7QSA };
    await tools.start(id, { ...mapping, columns: { time: 1, call: 1, freq: 2, snr: 2 } } as SpotMapping);
    const record = await tools.until(id, ({ state }) => state === 'failed');
    expect(record.error).toMatch(/^More than 30000 lines were refused; most likely the mapping is wrong/);
    expect(record.rowsRefused).toBeLessThan(100_000);
    const { reasons } = await tools.refusals(id);
    expect(reasons.map(({ lines }) => lines)).toEqual([record.rowsRefused]);
  });

  it('shows in the preview what the import then does, row by row', async () => {
    const { tools } = await openStation();
    const text = [
      madeUpHeader,
      madeUpRow(0),
      '2026-02-31T18:00:00Z,EI7QSA,EA8QSH,1824.5,CW,21,22',
      madeUpRow(1).replace('EI7QSC', 'EI7QSZ'),
      madeUpRow(2),
    ].join('\n');
    const { id } = await tools.upload('spots', text);
    const preview = await tools.preview(id);
    expect(preview.header).toEqual(madeUpHeader.split(','));
    expect(preview.unknownReceivers).toEqual(['EI7QSZ']);
    expect(preview.rows.map(({ lineNo }) => lineNo)).toEqual([2, 3, 4, 5]);
    expect(preview.read.map(({ ok }) => ok)).toEqual([true, false, false, true]);
    expect(preview.read[0]!.values).toEqual({
      time: '2026-01-05T16:00:00Z',
      receiver: 'EI7QSA',
      call: 'EA8QRA',
      freq: '1810.0 kHz',
      band: '160 m',
      snr: '5 dB',
      mode: 'CW',
      speed: '18 WPM',
    });
    await tools.start(id, preview.guess);
    const record = await tools.until(id, ({ state }) => state === 'done');
    expect(record).toMatchObject({ rowsStored: 2, rowsRefused: 2 });
    const shown = preview.read
      .filter(({ ok }) => !ok)
      .map(({ lineNo, field, reason }) => ({ lineNo, field, reason }));
    const { items } = await tools.refusals(id);
    expect(items.map(({ lineNo, field, reason }) => ({ lineNo, field, reason }))).toEqual(shown);
  });

  it('answers a preview of bytes that are no text, too', async () => {
    const { station, tools } = await openStation();
    const { id } = await tools.upload('spots', Buffer.from([0, 1, 2, 3, 255, 254, 0, 10, 0, 0, 7, 10]));
    const reply = await api.call(previewImport, {
      token: station.token,
      params: { stationId: station.stationId, importId: id },
      body: {},
    });
    expect(reply.status).toBe(200);
    expect((reply.body as ImportPreview).read.filter(({ ok }) => ok)).toEqual([]);
  });
});
