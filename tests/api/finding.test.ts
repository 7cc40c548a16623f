import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { parse } from 'csv-parse/sync';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { compare, comparisonAnswer, saveTrial } from '../../shared/contracts/comparison.ts';
import type { BodyInput } from '../../shared/contracts/endpoint.ts';
import { applyDwellChanges, listDwells } from '../../shared/contracts/dwell.ts';
import * as contract from '../../shared/contracts/finding.ts';
import type { Finding, Recomputation } from '../../shared/contracts/finding.ts';
import { undoImport, type ImportMapping } from '../../shared/contracts/import.ts';
import { readJob } from '../../shared/contracts/job.ts';
import { updateAntenna } from '../../shared/contracts/antenna.ts';
import { updateStation } from '../../shared/contracts/station.ts';
import { Station } from '../../server/database/entities/station.ts';
import type { JobRunner } from '../../worker/jobs/job-runner.ts';
import { makeAllDirtyNights } from '../../worker/units/dirty-nights.ts';
import { runUnitsJob } from '../../worker/units/units.job.ts';
import { startTestApi, type TestApi, type TestReply } from '../helpers/api.ts';
import { makeImportTools, startJobRunner } from '../helpers/imports.ts';
import { storeSampleStation } from '../helpers/sample-station.ts';

/** The invented data of the sample station, imported through the API as a person would. */
const folder = fileURLToPath(new URL('../reference/sample-station/', import.meta.url));
const dwellFile = readFileSync(`${folder}swap-dwells.csv`);
const spotFile = readFileSync(`${folder}swap-spots.csv`);
const make = (guess: ImportMapping): ImportMapping =>
  guess.kind === 'dwells' ? { ...guess, unknownNames: 'make' } : guess;

let api: TestApi;
let runner: JobRunner;
let stationId: number;
let analyst: string;
let contester: string;
let tools: ReturnType<typeof makeImportTools>;
let antennas: Record<'ALPHA' | 'BRAVO' | 'CHARLIE', number>;
let spotImportId: number;
let dwellImportId: number;

beforeAll(async () => {
  api = await startTestApi();
  runner = startJobRunner(api.dataSource, 'test worker', { units: runUnitsJob });
  const station = await api.dataSource.getRepository(Station).save({
    name: 'Sample station',
    callSign: 'EI7QSB',
    locator: 'IO53',
    latitudeDeg: 53.5,
    longitudeDeg: -9,
    timeZone: 'Europe/Dublin',
    ituRegion: 1,
  });
  stationId = station.id;
  analyst = (await api.addPerson(stationId, 'analyst', 'aoife@corrib.example')).token;
  contester = (await api.addPerson(stationId, 'contester')).token;
  tools = makeImportTools(api, { stationId, token: analyst });
  dwellImportId = (await tools.run('dwells', dwellFile, make)).id;
  spotImportId = (await tools.run('spots', spotFile)).id;
  await makeUnits();
  const rows: { name: string; id: number }[] = await api.dataSource.query(
    'SELECT name, id FROM antenna WHERE station_id = $1',
    [stationId],
  );
  antennas = Object.fromEntries(rows.map(({ name, id }) => [name, id])) as typeof antennas;
});
afterAll(async () => {
  await runner.stop();
  await api.close();
});

const makeUnits = () => makeAllDirtyNights(api.dataSource, Date.now());

async function freeze(
  body: Partial<BodyInput<typeof contract.freezeFinding>> = {},
  token = analyst,
): Promise<TestReply> {
  return api.call(contract.freezeFinding, {
    params: { stationId },
    token,
    body: {
      title: 'Alpha or Bravo',
      question: { antennaA: antennas.ALPHA, antennaB: antennas.BRAVO },
      ...body,
    },
  });
}
async function frozen(body: Partial<BodyInput<typeof contract.freezeFinding>> = {}): Promise<Finding> {
  const reply = await freeze(body);
  if (reply.status !== 201) throw new Error(`${reply.status} ${reply.text}`);
  return contract.finding.parse(reply.body);
}
async function recomputed({ id }: Finding): Promise<Recomputation> {
  const reply = await api.call(contract.recomputeFinding, {
    params: { stationId, findingId: id },
    token: analyst,
  });
  if (reply.status !== 200) throw new Error(`${reply.status} ${reply.text}`);
  return contract.recomputation.parse(reply.body);
}
async function undo(importId: number): Promise<void> {
  await tools.ask(undoImport, { importId });
  await tools.until(importId, ({ state }) => state === 'undone');
  await makeUnits();
}
const sentences = (reply: Recomputation, about: string) =>
  reply.changes.filter((change) => change.about === about).map((change) => change.sentence);
const errorsOf = (reply: TestReply) =>
  (reply.body as { errors?: { path: string; message: string }[] }).errors;

describe('a frozen finding', () => {
  it('holds the answer of the comparison, with every default of its question resolved', async () => {
    const question = { antennaA: antennas.ALPHA, antennaB: antennas.BRAVO };
    const asked = await api.call(compare, { params: { stationId }, token: analyst, body: question });
    const answer = comparisonAnswer.parse(asked.body);
    const finding = await frozen({ note: 'Before the frost' });
    expect(finding).toMatchObject({
      title: 'Alpha or Bravo',
      note: 'Before the frost',
      trial: null,
      frozenBy: 'analyst 1',
      latestDecision: null,
      leftOutNight: null,
      decisions: [],
      counts: answer.counts,
      verdict: answer.verdict,
      firstNight: answer.preparation.firstNight,
      lastNight: answer.preparation.lastNight,
      question: {
        fromNight: answer.preparation.firstNight,
        toNight: answer.preparation.lastNight,
        rules: { blockMinutes: 15, windowSeconds: 30, freqToleranceKhz: 0.3, guardSeconds: 20 },
        marginDb: 1,
      },
      station: { callSign: 'EI7QSB', locator: 'IO53' },
    });
    // The order in which a sum is taken moves its last digits only.
    expect(finding.estimate!.estimateDb).toBeCloseTo(answer.estimate!.estimateDb, 12);
    expect(finding.sentence).toMatch(/^Does ALPHA hear better than BRAVO on .* between .*\?$/);
    expect(finding.dwells).toBe(480);
    expect(finding.nightDigests.reduce((sum, night) => sum + night.units, 0)).toBe(answer.counts.units);
    expect(finding.nightDigests).toHaveLength(answer.counts.nights);
    expect(finding.programVersion).toMatch(/^\d+\.\d+\.\d+/);
  });

  it('has the SHA-256 of its units for a digest, which anybody can work out from the CSV', async () => {
    const finding = await frozen({
      question: { antennaA: antennas.ALPHA, antennaB: antennas.BRAVO, bandsMetres: [160] },
    });
    const csv = await api.call(contract.findingUnits, {
      params: { stationId, findingId: finding.id },
      token: contester,
    });
    expect(csv.headers.get('content-type')).toBe('text/csv; charset=utf-8');
    const rows = parse(csv.text, { columns: true }) as Record<string, string>[];
    expect(rows).toHaveLength(finding.counts.units);
    const night = finding.nightDigests.find((each) => each.heardOnly === 0) ?? finding.nightDigests[0]!;
    const lines = rows
      .filter((row) => row.night === night.night)
      .map((row) => {
        const place = [row.block_start_utc, row.call, row.band_m, row.kind, row.receiver_a, row.receiver_b];
        return `u\t${place.join()}\t${row.spots_a},${row.spots_b},${row.difference_db}\n`;
      })
      .sort();
    expect(lines).toHaveLength(night.units);
    const heardOnly = await heardOnlyLines(night.night);
    expect(heardOnly.count).toBe(night.heardOnly);
    const text = `night\t${night.night}\n${lines.join('')}${heardOnly.lines.join('')}`;
    expect(createHash('sha256').update(text).digest('hex')).toBe(night.digest);
  });

  /** The heard-only lines of a night on 160 m, read from the stored packs without the code under test. */
  async function heardOnlyLines(night: string): Promise<{ lines: string[]; count: number }> {
    const [row] = (await api.dataSource.query(
      `SELECT heard_only FROM unit_pack WHERE station_id = $1 AND night = $2 AND antenna_a = $3 AND antenna_b = $4`,
      [stationId, night, Math.min(antennas.ALPHA, antennas.BRAVO), Math.max(antennas.ALPHA, antennas.BRAVO)],
    )) as { heard_only: Buffer }[];
    const pack = row!.heard_only;
    const count = pack.length === 0 ? 0 : pack.readUInt32LE(8);
    const routes = count === 0 ? 0 : pack.readUInt32LE(24);
    const calls: { id: number; call: string }[] = await api.dataSource.query(
      'SELECT id, call FROM call_sign',
    );
    const callOf = new Map(calls.map(({ id, call }) => [id, call]));
    const body = 32 + routes * 16;
    const seen = new Map<string, number>();
    for (let i = 0; i < count; i++) {
      const route = 32 + pack.readUInt16LE(body + count * 8 + i * 2) * 16;
      if (pack.readInt32LE(route) !== 160) continue;
      const isLower = pack.readInt32LE(route + 12) === 0;
      const onA = isLower === antennas.ALPHA < antennas.BRAVO;
      const key = `${callOf.get(pack.readInt32LE(body + i * 4))},160,${onA ? 'a' : 'b'}`;
      seen.set(key, (seen.get(key) ?? 0) + 1);
    }
    const total = [...seen.values()].reduce((sum, times) => sum + times, 0);
    const lines = [...seen]
      .sort(([a], [b]) => (a < b ? -1 : 1))
      .map(([key, times]) => `h\t${key}\t${times}\n`);
    return { lines, count: total };
  }

  it('can be made of a trial, whose question it takes and whose name it shows', async () => {
    const saved = await api.call(saveTrial, {
      params: { stationId },
      token: analyst,
      body: {
        name: 'Top band',
        question: { antennaA: antennas.BRAVO, antennaB: antennas.ALPHA, bandsMetres: [160], marginDb: 2 },
      },
    });
    const trialId = (saved.body as { id: number }).id;
    const finding = await frozen({ question: null, trialId });
    expect(finding.trial).toEqual({ id: trialId, name: 'Top band' });
    expect(finding.question).toMatchObject({ antennaA: antennas.BRAVO, bandsMetres: [160], marginDb: 2 });
    expect(finding.antennas.a.name).toBe('BRAVO');
  });

  it('is listed newest first, page by page, and read by every member', async () => {
    const ids: number[] = [];
    let after: string | undefined;
    do {
      const reply = await api.call(contract.listFindings, {
        params: { stationId },
        query: { limit: 2, after },
        token: contester,
      });
      const page = contract.listFindings.reply.parse(reply.body);
      ids.push(...page.items.map((item) => item.id));
      after = page.next ?? undefined;
    } while (after !== undefined);
    const rows: { id: number }[] = await api.dataSource.query(
      'SELECT id FROM finding WHERE station_id = $1 ORDER BY id DESC',
      [stationId],
    );
    expect(ids).toEqual(rows.map(({ id }) => id));
    const one = await api.call(contract.readFinding, {
      params: { stationId, findingId: ids[0]! },
      token: contester,
    });
    expect(one.status).toBe(200);
  });

  it('is not made of nothing: no question, no such trial, no finished night, no units', async () => {
    const neither = await freeze({ question: null });
    expect(errorsOf(neither)).toEqual([
      { path: 'body.question', message: 'Give a question or a trial to freeze.' },
    ]);
    const stranger = await freeze({ question: null, trialId: 999_999 });
    expect(errorsOf(stranger)).toEqual([{ path: 'body.trialId', message: 'The station has no such trial.' }]);
    const pair = { antennaA: antennas.ALPHA, antennaB: antennas.BRAVO };
    const future = await freeze({ question: { ...pair, fromNight: '2099-01-01' } });
    expect([future.status, (future.body as { code: string }).code]).toEqual([409, 'nothing-to-freeze']);
    const empty = await freeze({ question: { ...pair, bandsMetres: [15] } });
    expect([empty.status, (empty.body as { code: string }).code]).toEqual([409, 'nothing-to-freeze']);
    expect(empty.text).toContain('No station was heard on both ALPHA and BRAVO');
  });

  it('is not made while nights that changed wait for their units', async () => {
    const [dwell] = (await api.dataSource.query(
      'SELECT starts_at FROM dwell WHERE station_id = $1 ORDER BY starts_at LIMIT 1',
      [stationId],
    )) as [{ starts_at: Date }];
    await api.dataSource.query(
      `INSERT INTO dirty_block (station_id, starts_at) VALUES ($1, date_trunc('hour', $2::timestamptz))`,
      [stationId, dwell.starts_at],
    );
    const reply = await freeze();
    expect([reply.status, (reply.body as { code: string }).code]).toEqual([409, 'units-pending']);
    await makeUnits();
  });

  it('cannot be changed or deleted in the database, nor can its decisions', async () => {
    const finding = await frozen();
    await api.call(contract.addDecision, {
      params: { stationId, findingId: finding.id },
      token: analyst,
      body: { decision: 'keep', reason: 'It hears.' },
    });
    const statements = [
      `UPDATE finding SET title = 'Other' WHERE id = ${finding.id}`,
      `UPDATE finding SET answer = '{}' WHERE id = ${finding.id}`,
      `UPDATE finding SET frozen_by = NULL, note = 'x' WHERE id = ${finding.id}`,
      `DELETE FROM finding WHERE id = ${finding.id}`,
      `UPDATE finding_decision SET reason = 'Other' WHERE finding_id = ${finding.id}`,
      `DELETE FROM finding_decision WHERE finding_id = ${finding.id}`,
      'TRUNCATE finding CASCADE',
      'TRUNCATE finding_decision',
    ];
    for (const statement of statements) {
      await expect(api.dataSource.query(statement), statement).rejects.toThrow(/never changed or deleted/);
    }
    const after = await api.call(contract.readFinding, {
      params: { stationId, findingId: finding.id },
      token: analyst,
    });
    expect(contract.finding.parse(after.body)).toMatchObject({
      title: finding.title,
      digest: finding.digest,
    });
  });

  it('keeps the name of who froze it when the account goes, and goes with its station', async () => {
    const person = await api.addPerson(stationId, 'manager');
    const reply = await freeze({}, person.token);
    const { id, frozenBy } = contract.finding.parse(reply.body);
    await api.dataSource.query('DELETE FROM app_user WHERE id = $1', [person.userId]);
    const [row] = await api.dataSource.query('SELECT frozen_by, frozen_by_name FROM finding WHERE id = $1', [
      id,
    ]);
    expect(row).toEqual({ frozen_by: null, frozen_by_name: frozenBy });
    const queryRunner = api.dataSource.createQueryRunner();
    await queryRunner.startTransaction();
    try {
      await queryRunner.query('DELETE FROM dwell WHERE station_id = $1', [stationId]);
      await queryRunner.query('DELETE FROM station WHERE id = $1', [stationId]);
      expect(await queryRunner.query('SELECT 1 FROM finding WHERE id = $1', [id])).toEqual([]);
    } finally {
      await queryRunner.rollbackTransaction();
      await queryRunner.release();
    }
  });

  it('keeps its four pictures as SVG that runs nothing and loads nothing', async () => {
    const finding = await frozen();
    for (const picture of contract.pictureName.options) {
      const reply = await api.call(contract.findingPicture, {
        params: { stationId, findingId: finding.id, picture },
        token: contester,
      });
      expect(reply.headers.get('content-type')).toBe('image/svg+xml; charset=utf-8');
      expect(reply.text).toMatch(/^<svg [\s\S]*<\/svg>$/);
      expect(reply.text).not.toMatch(
        /<script|<style|<image|<foreignObject|<use|\son\w+=|href=|url\((?!#)|@import/i,
      );
    }
  });
});

describe('decisions on a finding', () => {
  it('are added one after the other; the last one counts and shows in the list', async () => {
    const finding = await frozen();
    const params = { stationId, findingId: finding.id };
    const decide = (body: BodyInput<typeof contract.addDecision>, token = analyst) =>
      api.call(contract.addDecision, { params, token, body });
    const first = await decide({ decision: 'keep', reason: 'Quiet on 160 m.' });
    expect(first.status).toBe(201);
    const second = await decide({
      decision: 'look again',
      about: 'b',
      lookAgainOn: '2027-03-01',
      reason: 'After the spring floods.',
    });
    expect(contract.decision.parse(second.body)).toMatchObject({
      decision: 'look again',
      antennaName: 'BRAVO',
      lookAgainOn: '2027-03-01',
      decidedBy: 'analyst 1',
    });
    const read = contract.finding.parse(
      (await api.call(contract.readFinding, { params, token: contester })).body,
    );
    expect(read.decisions.map((each) => each.decision)).toEqual(['keep', 'look again']);
    expect(read.latestDecision).toEqual(read.decisions[1]);
    const list = contract.listFindings.reply.parse(
      (await api.call(contract.listFindings, { params: { stationId }, token: contester })).body,
    );
    expect(list.items.find((item) => item.id === finding.id)!.latestDecision).toEqual(read.decisions[1]);
    expect((await decide({ decision: 'keep', reason: 'No.' }, contester)).status).toBe(403);
    const dateless = await decide({ decision: 'look again', reason: 'Some day.' });
    expect(errorsOf(dateless)![0]).toMatchObject({ path: 'body.lookAgainOn' });
    expect(errorsOf(await decide({ decision: 'keep', reason: ' ' }))).toEqual([
      { path: 'body.reason', message: 'Say why.' },
    ]);
  });
});

describe('a finding asked again', () => {
  it('gives the same digest and the same numbers after its data were undone and imported again', async () => {
    const finding = await frozen({
      question: { antennaA: antennas.ALPHA, antennaB: antennas.BRAVO, marginDb: 0.5 },
    });
    expect(await recomputed(finding)).toMatchObject({ same: true, sentence: 'Same data, same numbers.' });

    await undo(spotImportId);
    const without = await recomputed(finding);
    expect(without.same).toBe(false);
    expect(without.now.counts.units).toBe(0);
    expect(without.nights.map((night) => night.removed)).toEqual(
      finding.nightDigests.map((night) => night.units),
    );
    expect(sentences(without, 'imports')).toEqual([
      expect.stringMatching(/^The import of log\.csv was undone \(analyst 1, .*Z\)\.$/),
    ]);
    await undo(dwellImportId);

    dwellImportId = (await tools.run('dwells', dwellFile, make)).id;
    spotImportId = (await tools.run('spots', spotFile)).id;
    await makeUnits();
    const again = await recomputed(finding);
    expect(again).toMatchObject({
      same: true,
      sentence: 'Same data, same numbers.',
      units: { same: true, digestThen: finding.digest, digestNow: finding.digest },
      program: { same: true, sameNumbers: true },
      nights: [],
      dwells: [],
    });
    // To the last bit: every number of the answer, not only those that are shown.
    expect(again.now.estimate).toEqual(finding.estimate);
    const second = await frozen({
      question: { antennaA: antennas.ALPHA, antennaB: antennas.BRAVO, marginDb: 0.5 },
    });
    expect(second.digest).toBe(finding.digest);
    expect(JSON.stringify(second.answer)).toBe(JSON.stringify(finding.answer));
  });

  it('explains a difference by the one dwell that was changed, who did it, and the night it moved', async () => {
    const finding = await frozen();
    const night = finding.nightDigests[1]!.night;
    const reply = await api.call(listDwells, {
      params: { stationId },
      query: { from: `${night}T19:00:00Z`, to: `${night}T23:00:00Z` },
      token: analyst,
    });
    const dwell = listDwells.reply.parse(reply.body).items.find((each) => each.antennaId === antennas.ALPHA)!;
    const change = (antennaId: number) =>
      api.call(applyDwellChanges, {
        params: { stationId },
        token: analyst,
        body: { changes: [{ action: 'edit', dwellId: dwell.id, antennaId }] },
      });
    await change(antennas.CHARLIE);
    const waiting = await recomputed(finding);
    expect(waiting.same).toBe(false);
    expect(waiting.sentence).toMatch(/^Not settled yet: the units of 1 night wait/);
    await makeUnits();

    const changed = await recomputed(finding);
    expect(changed).toMatchObject({ same: false, units: { same: false }, program: { sameNumbers: true } });
    expect(changed.sentence).toMatch(
      new RegExp(`^Other data: the units of the night of ${night} are not as they were\\. It was [+−]`),
    );
    expect(changed.nights).toHaveLength(1);
    expect(changed.nights[0]).toMatchObject({ night, unitsThen: finding.nightDigests[1]!.units });
    expect(changed.nights[0]!.removed).toBeGreaterThan(0);
    expect(changed.dwells).toHaveLength(1);
    expect(changed.dwells[0]).toMatchObject({
      change: 'changed',
      before: { antenna: 'ALPHA', startsAt: dwell.startsAt },
      after: { antenna: 'CHARLIE', startsAt: dwell.startsAt },
      by: 'analyst 1',
    });
    expect(sentences(changed, 'dwells')).toEqual([
      expect.stringMatching(
        /^Dwell changed: EI7QS[ACD] on ALPHA, .*Z to .*Z is now on CHARLIE instead of ALPHA \(analyst 1, .*Z\)\.$/,
      ),
    ]);

    await change(antennas.ALPHA);
    await makeUnits();
    expect(await recomputed(finding)).toMatchObject({ same: true, dwells: [], nights: [] });
  });

  it('stays the same under new names, and says who is called what today', async () => {
    const finding = await frozen();
    const rename = (name: string) =>
      api.call(updateAntenna, {
        params: { stationId, antennaId: antennas.ALPHA },
        token: managerToken,
        body: { name },
      });
    const { token: managerToken } = await api.addPerson(stationId, 'manager');
    await rename('North wire');
    const reply = await recomputed(finding);
    expect(reply).toMatchObject({ same: true, units: { digestNow: finding.digest } });
    expect(sentences(reply, 'names')).toEqual(['ALPHA is called North wire today.']);
    await rename('ALPHA');
  });

  it('is asked under its own rules when the station has others, after their units were made', async () => {
    const finding = await frozen();
    const { token: manager } = await api.addPerson(stationId, 'manager');
    const setGuard = (guardSeconds: number, marginDb: number) =>
      api.call(updateStation, {
        params: { stationId },
        token: manager,
        body: { guardSeconds, marginDb, sectorCount: guardSeconds === 20 ? 12 : 8 },
      });
    await setGuard(40, 3);
    await makeUnits();
    const ask = (token: string) =>
      api.call(contract.recomputeFinding, { params: { stationId, findingId: finding.id }, token });
    let reply = await ask(analyst);
    while (reply.status === 202) {
      const { jobId } = reply.body as { jobId: number };
      const done = await jobEnd(jobId);
      expect(done).toBe('done');
      reply = await ask(analyst);
    }
    const told = contract.recomputation.parse(reply.body);
    expect(told).toMatchObject({ same: true, sentence: 'Same data, same numbers.' });
    expect(sentences(told, 'rules')).toEqual([
      expect.stringContaining(
        'guard 40\u2009s instead of 20\u2009s, margin 3.0\u2009dB instead of 1.0\u2009dB',
      ),
    ]);
    await setGuard(20, 1);
    await makeUnits();
  });

  async function jobEnd(jobId: number): Promise<string> {
    for (;;) {
      const event = new Promise<void>((resolve) => {
        const stop = api.deps.eventHub.subscribe(stationId, () => {
          stop();
          resolve();
        });
      });
      const reply = await api.call(readJob, { params: { stationId, jobId }, token: analyst });
      const { state } = readJob.reply.parse(reply.body);
      if (state !== 'queued' && state !== 'running') return state;
      await event;
    }
  }

  it('cannot be asked again when an antenna is gone, and says so; the record stays', async () => {
    const other = await storeSampleStation(api.dataSource, 'alternate');
    const { token } = await api.addPerson(other.stationId, 'manager');
    const params = { stationId: other.stationId };
    const question = { antennaA: other.antennas.ALPHA!, antennaB: other.antennas.BRAVO! };
    const body = { title: 'Gone', question };
    const made = contract.finding.parse(
      (await api.call(contract.freezeFinding, { params, token, body })).body,
    );
    await api.dataSource.query('DELETE FROM dwell WHERE station_id = $1', [other.stationId]);
    await api.dataSource.query('DELETE FROM antenna WHERE id = $1', [question.antennaA]);
    const asked = { params: { ...params, findingId: made.id }, token };
    const reply = await api.call(contract.recomputeFinding, asked);
    expect([reply.status, (reply.body as { code: string }).code]).toEqual([409, 'antenna-removed']);
    const still = contract.finding.parse((await api.call(contract.readFinding, asked)).body);
    expect(still.antennas.a.name).toBe('ALPHA');
  });

  it('tells a damaged record from changed data', async () => {
    const finding = await frozen();
    // Somebody with the database's own rights could switch the triggers off; the digest would tell.
    await api.dataSource.transaction(async (manager) => {
      await manager.query("SET LOCAL session_replication_role = 'replica'");
      await manager.query('UPDATE finding SET digest = $2 WHERE id = $1', [finding.id, Buffer.alloc(32, 7)]);
    });
    const reply = await recomputed(finding);
    expect(reply.same).toBe(false);
    expect(reply.sentence).toBe('The stored units do not give the stored digest: the record is damaged.');
  });

  it('answers nobody of another station', async () => {
    const finding = await frozen();
    const other = await api.dataSource.getRepository(Station).save({
      name: 'Other',
      callSign: 'EI9QSF',
      locator: 'IO53',
      latitudeDeg: 53.5,
      longitudeDeg: -9,
      timeZone: 'Europe/Dublin',
      ituRegion: 1,
    });
    const { token } = await api.addPerson(other.id, 'manager');
    const endpoints = [
      contract.readFinding,
      contract.recomputeFinding,
      contract.findingPdf,
      contract.findingUnits,
      contract.listShares,
    ];
    for (const endpoint of endpoints) {
      for (const station of [stationId, other.id]) {
        const reply = await api.call(endpoint, {
          params: { stationId: station, findingId: finding.id },
          token,
        });
        expect(reply.status, `${endpoint.path} of ${station}`).toBe(404);
      }
    }
  });
});
