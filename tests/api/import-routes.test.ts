import { createHash } from 'node:crypto';
import { once } from 'node:events';
import { connect } from 'node:net';
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';
import {
  cancelImport,
  listImports,
  listMappings,
  previewImport,
  readImport,
  removeMapping,
  saveMapping,
  startImport,
  undoImport,
  uploadImport,
  type ImportMapping,
  type ImportRecord,
} from '../../shared/contracts/import.ts';
import { settleImports } from '../../worker/imports/housekeeping.ts';
import { startTestApi, type TestApi } from '../helpers/api.ts';
import {
  insertImportStation,
  madeUpHeader,
  madeUpRow,
  makeImportTools,
  startJobRunner,
  type ImportStation,
} from '../helpers/imports.ts';

/** Uploads that go wrong, states that do not fit, mappings, and what becomes of dead jobs. No worker runs. */
let api: TestApi;
let station: ImportStation;
let tools: ReturnType<typeof makeImportTools>;
const log = [madeUpHeader, madeUpRow(0), madeUpRow(1)].join('\n');

beforeAll(async () => {
  api = await startTestApi();
  station = await insertImportStation(api);
  tools = makeImportTools(api, station);
});
afterAll(() => api.close());

const params = (importId?: number): Record<string, number> =>
  importId === undefined ? { stationId: station.stationId } : { stationId: station.stationId, importId };

async function send(form: FormData) {
  return api.call(uploadImport, {
    token: station.token,
    params: params(),
    query: { kind: 'spots' },
    body: form,
  });
}
function formWith(field: string, content: Buffer | string, name = 'log.csv'): FormData {
  const form = new FormData();
  form.append(field, new Blob([Buffer.from(content)]), name);
  return form;
}
async function countImports(): Promise<number> {
  const [row] = await api.dataSource.query('SELECT count(*) AS n FROM import WHERE station_id = $1', [
    station.stationId,
  ]);
  return row.n;
}

describe('uploads', () => {
  it.each([
    ['an empty file', formWith('file', ''), /is empty/],
    ['another field', formWith('upload', log), /in the field "file"/],
    ['a spreadsheet', formWith('file', Buffer.from('504b030414000600', 'hex')), /save the sheet as CSV/],
    ['a bzip2 file', formWith('file', Buffer.from('425a68393141592653', 'hex')), /packed with bzip2/],
  ])('refuses %s with a sentence and keeps nothing', async (_what, form, sentence) => {
    const before = await countImports();
    const reply = await send(form);
    expect(reply.status).toBe(400);
    const { errors } = reply.body as { errors: { path: string; message: string }[] };
    expect(errors[0]!.path).toBe('body.file');
    expect(errors[0]!.message).toMatch(sentence);
    expect(await countImports()).toBe(before);
  });

  it('refuses a second file in one request', async () => {
    const form = formWith('file', log);
    form.append('file', new Blob(['b']), 'other.csv');
    const reply = await send(form);
    expect(reply.status).toBe(400);
    expect(reply.text).toMatch(/one file at a time/);
  });

  it('refuses a body that is no form', async () => {
    const reply = await api.call(uploadImport, {
      token: station.token,
      params: params(),
      query: { kind: 'spots' },
      headers: { 'content-type': 'text/csv' },
    });
    expect(reply.status).toBe(400);
    expect(reply.text).toMatch(/multipart\/form-data/);
  });

  it('refuses what announces more than 2 GB before reading it', async () => {
    const socket = connect(Number(new URL(api.url).port), '127.0.0.1');
    await once(socket, 'connect');
    socket.write(uploadHead(3 * 2 ** 30));
    const [answer] = (await once(socket, 'data')) as [Buffer];
    socket.destroy();
    expect(answer.toString()).toMatch(/^HTTP\/1\.1 413 /);
    expect(answer.toString()).toMatch(/larger than 2 GB/);
  });

  it('leaves nothing of an upload that is broken off', async () => {
    const before = await countImports();
    const socket = connect(Number(new URL(api.url).port), '127.0.0.1');
    await once(socket, 'connect');
    socket.write(uploadHead(10_000_000));
    socket.write('--xx\r\nContent-Disposition: form-data; name="file"; filename="a.csv"\r\n\r\n');
    socket.write('utc,rx\r\n'.repeat(10_000));
    await vi.waitFor(async () => expect(await countImports()).toBe(before + 1));
    socket.destroy();
    await vi.waitFor(async () => expect(await countImports()).toBe(before));
  });

  function uploadHead(length: number): string {
    return [
      `POST /api/stations/${station.stationId}/imports?kind=spots HTTP/1.1`,
      'Host: 127.0.0.1',
      `Authorization: Bearer ${station.token}`,
      'Content-Type: multipart/form-data; boundary=xx',
      `Content-Length: ${length}`,
      '\r\n',
    ].join('\r\n');
  }

  it('shows a clean file name and the fingerprint of the bytes as sent', async () => {
    const record = await tools.upload('spots', log, `../../etc/pass wd ${'x'.repeat(300)}`);
    expect(record.fileName).toMatch(/^pass wd x+$/);
    expect(record.fileName.length).toBe(200);
    expect(record).toMatchObject({ state: 'uploaded', sizeBytes: log.length, rowsRead: 0 });
    expect(record.sha256).toBe(createHash('sha256').update(log).digest('hex'));
  });

  it('lists the newest first, in pages', async () => {
    const made = [await tools.upload('spots', log), await tools.upload('spots', log)];
    const page = await tools.ask<{ items: ImportRecord[]; next: string }>(listImports, {
      query: { limit: 1 },
    });
    expect(page.items.map(({ id }) => id)).toEqual([made[1]!.id]);
    const next = await tools.ask<{ items: ImportRecord[] }>(listImports, {
      query: { limit: 1, after: page.next },
    });
    expect(next.items.map(({ id }) => id)).toEqual([made[0]!.id]);
  });
});

describe('mappings of imports', () => {
  async function refusalOf(importId: number, mapping: ImportMapping) {
    const reply = await api.call(startImport, {
      token: station.token,
      params: params(importId),
      body: { mapping },
    });
    expect(reply.status).toBe(400);
    return (reply.body as { errors: { path: string; message: string }[] }).errors;
  }

  it('names each column that the file does not have', async () => {
    const { id } = await tools.upload('spots', log);
    const { guess } = await tools.preview(id);
    if (guess.kind !== 'spots') throw new Error('guessed another kind');
    expect(await refusalOf(id, { ...guess, columns: { ...guess.columns, snr: 'strength' } })).toEqual([
      {
        path: 'body.mapping.columns.snr',
        message:
          'The file has no column "strength"; its columns are "utc", "rx", "call", "khz", "mode", "snr_db", "wpm".',
      },
    ]);
    const missing = await refusalOf(id, { ...guess, columns: {} });
    expect(missing.map(({ path }) => path)).toEqual(
      ['time', 'call', 'freq', 'snr', 'receiver'].map((name) => `body.mapping.columns.${name}`),
    );
  });

  it('refuses receivers of another station, unknown zones and patterns without minutes', async () => {
    const foreign = await insertImportStation(api);
    const { id } = await tools.upload('spots', log);
    const { guess } = await tools.preview(id);
    if (guess.kind !== 'spots') throw new Error('guessed another kind');
    const foreignId = foreign.receivers.EI7QSA;
    expect(await refusalOf(id, { ...guess, fixedReceiverId: foreignId })).toMatchObject([
      { path: 'body.mapping.fixedReceiverId' },
    ]);
    expect(await refusalOf(id, { ...guess, receiverNames: { shed: foreignId } })).toMatchObject([
      { path: 'body.mapping.receiverNames.shed' },
    ]);
    expect(await refusalOf(id, { ...guess, time: { kind: 'iso', zone: 'Europe/Atlantis' } })).toEqual([
      {
        path: 'body.mapping.time',
        message: '"Europe/Atlantis" is no time zone; give UTC or a name such as Europe/Dublin.',
      },
    ]);
    expect(
      await refusalOf(id, { ...guess, time: { kind: 'pattern', pattern: 'yyyy-MM-dd', zone: 'UTC' } }),
    ).toMatchObject([{ path: 'body.mapping.time' }]);
  });

  it('refuses a mapping of the other kind', async () => {
    const { id } = await tools.upload('dwells', 'rx,antenna,start\nEI7QSA,West,2026-01-05T18:00:00Z');
    const { guess } = await tools.preview((await tools.upload('spots', log)).id);
    expect(await refusalOf(id, guess)).toEqual([
      {
        path: 'body.mapping.kind',
        message: 'The file was uploaded as dwells, the mapping is for spots.',
      },
    ]);
  });

  it('saves a mapping under a name, replaces it under the same name in any case, and forgets it', async () => {
    const { guess } = await tools.preview((await tools.upload('spots', log)).id);
    const save = (name: string, mapping: ImportMapping) =>
      tools.ask<{ id: number }>(saveMapping, { body: { name, mapping } });
    const first = await save('Shed skimmer', guess);
    const second = await save('shed SKIMMER', { ...guess, timeKnownTo: 'minute' } as ImportMapping);
    expect(second.id).toBe(first.id);
    const saved = await tools.ask<{ items: unknown[] }>(listMappings);
    expect(saved.items).toEqual([
      { id: first.id, kind: 'spots', name: 'shed SKIMMER', mapping: { ...guess, timeKnownTo: 'minute' } },
    ]);
    const remove = () =>
      api.call(removeMapping, {
        token: station.token,
        params: { stationId: station.stationId, mappingId: first.id },
      });
    expect((await remove()).status).toBe(204);
    expect((await remove()).status).toBe(404);
  });
});

describe('states of an import', () => {
  it('answers 404 to an import of another station', async () => {
    const foreign = await insertImportStation(api);
    const { id } = await makeImportTools(api, foreign).upload('spots', log);
    const { guess } = await makeImportTools(api, foreign).preview(id);
    for (const [endpoint, body] of [
      [readImport, undefined],
      [previewImport, {}],
      [startImport, { mapping: guess }],
      [cancelImport, undefined],
      [undoImport, undefined],
    ] as const) {
      const reply = await api.call(endpoint, {
        token: station.token,
        params: params(id),
        body: body as never,
      });
      expect(reply.status, endpoint.path).toBe(404);
    }
  });

  it('starts an import once, and cancels it before a worker took it', async () => {
    const { id } = await tools.upload('spots', log);
    const { guess } = await tools.preview(id);
    const started = await tools.start(id, guess);
    expect(started).toMatchObject({ state: 'queued', mapping: guess });
    const again = await api.call(startImport, {
      token: station.token,
      params: params(id),
      body: { mapping: guess },
    });
    expect(again.status).toBe(409);
    const undo = await api.call(undoImport, { token: station.token, params: params(id) });
    expect(undo.status).toBe(409);
    expect((await tools.ask<ImportRecord>(cancelImport, { importId: id })).state).toBe('cancelled');
    const twice = await api.call(cancelImport, { token: station.token, params: params(id) });
    expect(twice.status).toBe(409);
    const [job] = await api.dataSource.query('SELECT state FROM job WHERE id = $1', [started.jobId]);
    expect(job).toEqual({ state: 'cancelled' });
    expect((await tools.start(id, guess)).state).toBe('queued');
  });

  it('lets one of two simultaneous starts through', async () => {
    const { id } = await tools.upload('spots', log);
    const { guess } = await tools.preview(id);
    const start = () =>
      api.call(startImport, { token: station.token, params: params(id), body: { mapping: guess } });
    const statuses = (await Promise.all([start(), start()])).map(({ status }) => status);
    expect(statuses.sort()).toEqual([202, 409]);
  });

  it('settles uploads that were never finished and imports whose job is dead or was cancelled', async () => {
    const { dataSource } = api;
    const { guess } = await tools.preview((await tools.upload('spots', log)).id);
    const queued = async () => {
      const { id } = await tools.upload('spots', log);
      const { jobId } = await tools.start(id, guess);
      return { id, jobId };
    };
    const [dead, cancelled, waiting] = [await queued(), await queued(), await queued()];
    await dataSource.query(`UPDATE job SET state = 'dead', error = 'disk full' WHERE id = $1`, [dead.jobId]);
    await dataSource.query(`UPDATE job SET state = 'cancelled' WHERE id = $1`, [cancelled.jobId]);
    const [old, fresh] = await dataSource.query(
      `INSERT INTO import (station_id, kind, file_name, state, created_at)
       VALUES ($1, 'spots', '', 'uploading', now() - interval '25 hours'), ($1, 'spots', '', 'uploading', now())
       RETURNING id`,
      [station.stationId],
    );
    expect(await settleImports(dataSource)).toEqual({ cleared: 1, settled: 2 });
    expect((await tools.read(dead.id)).state).toBe('failed');
    expect((await tools.read(dead.id)).error).toMatch(/disk full$/);
    expect((await tools.read(cancelled.id)).state).toBe('cancelled');
    expect((await tools.read(waiting.id)).state).toBe('queued');
    const left = await dataSource.query('SELECT id FROM import WHERE id = ANY($1)', [[old.id, fresh.id]]);
    expect(left).toEqual([{ id: fresh.id }]);
    expect(await settleImports(dataSource)).toEqual({ cleared: 0, settled: 0 });
  });
});

describe('switch logs', () => {
  const from = (text: string) => text.replace(/^ +/gm, '');

  it('ends each line where the next one starts and names the dwell in the way', async () => {
    const runner = startJobRunner(api.dataSource);
    try {
      const own = await insertImportStation(api);
      const ownTools = makeImportTools(api, own);
      await api.dataSource.query(
        `INSERT INTO dwell (station_id, receiver_id, antenna_id, starts_at, ends_at, source)
         VALUES ($1, $2, $3, '2026-01-05T20:00Z', '2026-01-05T21:00Z', 'hand')`,
        [own.stationId, own.receivers.EI7QSA, own.antennaIds[0]],
      );
      const record = await ownTools.run(
        'dwells',
        from(`time,rx,antenna,comment
          2026-01-05 18:00,EI7QSA,north-east,"first
          of the night"
          2026-01-05 18:30,EI7QSA,Nowhere,
          2026-01-05 19:00,EI7QSA,West,
          2026-01-05 20:30,EI7QSA,West,late
          2026-01-05 21:00,EI7QSA,West,
          2026-01-05 18:00,EI7QSC,West,`),
      );
      expect(record).toMatchObject({ rowsRead: 6, rowsStored: 4, rowsRefused: 2, error: null });
      const { items } = await ownTools.refusals(record.id);
      expect(items.map(({ lineNo, field }) => [lineNo, field])).toEqual([
        [4, 'antenna'],
        [6, 'startsAt'],
      ]);
      expect(items[1]!.reason).toBe(
        'The receiver was on "North-east" from "2026-01-05T20:00:00Z" to "2026-01-05T21:00:00Z" (in the switch log); ' +
          'it cannot be on two antennas at once. Correct one of the two.',
      );
      const dwells = await api.dataSource.query(
        `SELECT r.call_sign AS rx, a.name AS antenna, starts_at AS f, ends_at AS u, note FROM dwell d
         JOIN receiver r ON r.id = d.receiver_id JOIN antenna a ON a.id = d.antenna_id
         WHERE d.station_id = $1 AND import_id = $2 ORDER BY rx, f`,
        [own.stationId, record.id],
      );
      const at = (clock: string) => new Date(`2026-01-05T${clock}:00Z`);
      expect(dwells).toEqual([
        { rx: 'EI7QSA', antenna: 'North-east', f: at('18:00'), u: at('18:30'), note: 'first\nof the night' },
        { rx: 'EI7QSA', antenna: 'West', f: at('19:00'), u: at('20:00'), note: '' },
        { rx: 'EI7QSA', antenna: 'West', f: at('21:00'), u: null, note: '' },
        { rx: 'EI7QSC', antenna: 'West', f: at('18:00'), u: null, note: '' },
      ]);
    } finally {
      await runner.stop();
    }
  });
});
