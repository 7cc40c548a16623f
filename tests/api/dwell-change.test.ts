import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import {
  applyDwellChanges,
  listDwells,
  previewDwellChanges,
  undoDwellChange,
} from '../../shared/contracts/dwell.ts';
import type { Dwell as DwellReply, DwellChange, DwellPreview } from '../../shared/contracts/dwell.ts';
import { role } from '../../shared/contracts/permission.ts';
import { Antenna } from '../../server/database/entities/antenna.ts';
import { AuditEntry } from '../../server/database/entities/audit-entry.ts';
import { DwellChange as StoredChange } from '../../server/database/entities/dwell-change.ts';
import { Dwell } from '../../server/database/entities/dwell.ts';
import { Membership } from '../../server/database/entities/membership.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
import { insertDwells, insertLogStation, insertSpots } from '../helpers/switch-log-rows.ts';
import type { LogStation } from '../helpers/switch-log-rows.ts';

interface Applied {
  batchId: string;
  dwells: DwellReply[];
  preview: DwellPreview;
  detail: string;
  errors?: { path: string; message: string }[];
}

let api: TestApi;
let operator: { token: string; userId: string };
let station: LogStation;
let ids: number[];

const at = (clock: string) => `2026-11-30T${clock}Z`;
const ms = (clock: string) => Date.parse(at(clock));

beforeAll(async () => {
  api = await startTestApi();
  operator = await api.addPerson((await insertLogStation(api.dataSource)).stationId, 'operator');
});
afterAll(() => api.close());
beforeEach(async () => {
  station = await insertLogStation(api.dataSource);
  const { stationId } = station;
  await api.dataSource
    .getRepository(Membership)
    .save({ stationId, userId: operator.userId, role: 'operator' });
  const [receiverId] = station.receiverIds;
  const [northEast, west] = station.antennaIds;
  ids = await insertDwells(api.dataSource, stationId, [
    { receiverId, antennaId: northEast, startMs: ms('18:00:00'), endMs: ms('18:10:00') },
    { receiverId, antennaId: west, startMs: ms('18:10:00'), endMs: ms('18:20:00') },
    { receiverId, antennaId: northEast, startMs: ms('18:30:00'), endMs: null },
  ]);
});

async function apply(changes: DwellChange[], token = operator.token) {
  const params = { stationId: station.stationId };
  const reply = await api.call(applyDwellChanges, { params, token, body: { changes } });
  return { status: reply.status, ...(reply.body as Applied) };
}
async function log(): Promise<string[]> {
  const { stationId } = station;
  const names = new Map(
    (await api.dataSource.getRepository(Antenna).findBy({ stationId })).map((a) => [a.id, a.name]),
  );
  const dwells = await api.dataSource
    .getRepository(Dwell)
    .find({ where: { stationId }, order: { receiverId: 'ASC', startsAt: 'ASC' } });
  return dwells.map(
    (d) =>
      `${d.receiverId === station.receiverIds[0] ? 'B' : 'C'} ${names.get(d.antennaId)} ` +
      `${d.startsAt.toISOString().slice(11, 19)}-${d.endsAt?.toISOString().slice(11, 19) ?? ''}`,
  );
}
const asItWas = ['B North-east 18:00:00-18:10:00', 'B West 18:10:00-18:20:00', 'B North-east 18:30:00-'];
const add = (startsAt: string, endsAt: string | null, receiver = 0): DwellChange => ({
  action: 'add',
  dwell: {
    receiverId: station.receiverIds[receiver]!,
    antennaId: station.verticalId,
    startsAt: at(startsAt),
    endsAt: endsAt === null ? null : at(endsAt),
    note: '',
  },
});

describe('correcting the switch log', () => {
  it('adds, edits, splits, closes and deletes in one go', async () => {
    const reply = await apply([
      add('18:20:00', '18:25:00'),
      { action: 'edit', dwellId: ids[0]!, endsAt: at('18:09:00'), note: 'left early' },
      { action: 'split', dwellId: ids[2]!, at: at('19:00:00'), antennaId: station.antennaIds[1] },
      { action: 'delete', dwellId: ids[1]! },
    ]);
    expect(reply.status).toBe(200);
    expect(await log()).toEqual([
      'B North-east 18:00:00-18:09:00',
      'B Vertical 18:20:00-18:25:00',
      'B North-east 18:30:00-19:00:00',
      'B West 19:00:00-',
    ]);
    const closed = await apply([
      { action: 'close', dwellId: reply.dwells.find((d) => d.endsAt === null)!.id, at: at('19:30:00') },
    ]);
    expect(closed.dwells[0]?.endsAt).toBe('2026-11-30T19:30:00.000Z');
    expect(await log()).toContain('B West 19:00:00-19:30:00');
  });

  it('lets two dwells trade antennas, times and places', async () => {
    const reply = await apply([
      { action: 'edit', dwellId: ids[0]!, startsAt: at('18:10:00'), endsAt: at('18:20:00') },
      { action: 'edit', dwellId: ids[1]!, startsAt: at('18:00:00'), endsAt: at('18:10:00') },
    ]);
    expect(reply.status).toBe(200);
    expect(await log()).toEqual(['B West 18:00:00-18:10:00', 'B North-east 18:10:00-18:20:00', asItWas[2]]);
  });

  it('keeps who made a dwell and where it came from when it is edited', async () => {
    const { stationId } = station;
    const dwells = api.dataSource.getRepository(Dwell);
    await dwells.update({ stationId, id: ids[0]! }, { source: 'import', importId: 7 });
    const before = await dwells.findOneByOrFail({ stationId, id: ids[0]! });
    await apply([{ action: 'edit', dwellId: ids[0]!, note: 'checked' }]);
    expect(await dwells.findOneByOrFail({ stationId, id: ids[0]! })).toEqual({ ...before, note: 'checked' });
  });

  it('names the dwell in the way of an overlap and changes nothing at all', async () => {
    const reply = await apply([add('20:00:00', '21:00:00', 1), add('18:15:00', '18:25:00')]);
    const sentence =
      'Two antennas at once cannot be: EI7QSB on Vertical from 2026-11-30 18:15:00Z to 2026-11-30 18:25:00Z would ' +
      'overlap EI7QSB on West from 2026-11-30 18:10:00Z to 2026-11-30 18:20:00Z. Shorten or delete one of them.';
    expect(reply).toMatchObject({
      status: 409,
      detail: sentence,
      errors: [{ path: 'body.changes.1', message: sentence }],
    });
    expect(await log()).toEqual(asItWas);
    expect(await api.dataSource.getRepository(StoredChange).countBy({ stationId: station.stationId })).toBe(
      0,
    );
    expect(await api.dataSource.getRepository(AuditEntry).countBy({ stationId: station.stationId })).toBe(0);
  });

  it('refuses overlaps among the changes themselves, also in the preview', async () => {
    const changes = [add('18:20:00', '18:26:00'), add('18:25:00', '18:30:00')];
    const params = { stationId: station.stationId };
    const preview = await api.call(previewDwellChanges, { params, token: operator.token, body: { changes } });
    expect(preview.status).toBe(409);
    expect((await apply(changes)).errors?.[0]?.path).toBe('body.changes.1');
    expect(await log()).toEqual(asItWas);
  });

  it('lets only the newest dwell of a receiver stay open', async () => {
    expect(await apply([add('18:25:00', null)])).toMatchObject({
      status: 409,
      detail:
        'Only the newest dwell of a receiver can stay open: give EI7QSB on Vertical from 2026-11-30 18:25:00Z on ' +
        'an end, because the log has EI7QSB on North-east from 2026-11-30 18:30:00Z on.',
    });
    expect((await apply([add('18:25:00', null, 1)])).status).toBe(200);
  });

  it('says which field of which change makes no sense', async () => {
    const cases: [DwellChange, string, string][] = [
      [
        { action: 'edit', dwellId: ids[0]!, startsAt: at('18:10:00') },
        'body.changes.0.startsAt',
        'The dwell would start at 2026-11-30 18:10:00Z and end at 2026-11-30 18:10:00Z: the end must come after the start.',
      ],
      [
        { action: 'split', dwellId: ids[0]!, at: at('18:10:00'), antennaId: station.verticalId },
        'body.changes.0.at',
        'Split within the dwell, which runs from 2026-11-30 18:00:00Z to 2026-11-30 18:10:00Z.',
      ],
      [
        { action: 'close', dwellId: ids[0]!, at: at('18:05:00') },
        'body.changes.0.dwellId',
        'This dwell ended at 2026-11-30 18:10:00Z already: edit its end instead.',
      ],
      [
        { action: 'close', dwellId: ids[2]!, at: at('18:30:00') },
        'body.changes.0.at',
        'Close it after its start, 2026-11-30 18:30:00Z.',
      ],
    ];
    for (const [change, path, message] of cases) {
      const reply = await apply([change]);
      expect(reply, change.action).toMatchObject({ status: 400, errors: [{ path, message }] });
    }
    const deleted: DwellChange = { action: 'delete', dwellId: ids[0]! };
    expect((await apply([deleted, deleted])).errors?.[0]).toEqual({
      path: 'body.changes.1.dwellId',
      message: 'An earlier change of this list deletes this dwell.',
    });
    expect((await apply([{ action: 'edit', dwellId: ids[0]!, note: '' }])).detail).toBe(
      'These changes leave the switch log as it is.',
    );
    // Half a second after the start, though it comes first in the order of text.
    expect((await apply([add('18:25:00', '18:25:00.5')])).status).toBe(200);
  });

  it('warns of an antenna outside its dates of service, and takes the correction', async () => {
    const { stationId } = station;
    await api.dataSource
      .getRepository(Antenna)
      .update({ stationId, name: 'Vertical' }, { inServiceFrom: '2026-12-03', inServiceTo: '2027-03-31' });
    const reply = await apply([add('20:00:00', '21:00:00', 1)]);
    expect(reply.status).toBe(200);
    expect(reply.preview.warnings).toEqual([
      'Vertical was in service from 2026-12-03 to 2027-03-31: EI7QSC on Vertical from 2026-11-30 20:00:00Z ' +
        'to 2026-11-30 21:00:00Z lies outside of that.',
    ]);
    const noted = await apply([{ action: 'edit', dwellId: reply.dwells[0]!.id, note: 'really' }]);
    expect(noted.preview.warnings).toEqual([]);
  });

  it('stores one of many overlapping corrections sent at once', async () => {
    // Every two of them overlap in 19:10 to 19:30.
    const replies = await Promise.all(
      Array.from({ length: 24 }, (_, i) =>
        apply([add(`19:${String(i % 10).padStart(2, '0')}:00`, '19:40:00', 1)]),
      ),
    );
    expect(replies.map((reply) => reply.status).sort()).toEqual([
      200,
      ...Array.from({ length: 23 }, () => 409),
    ]);
    expect((await log()).filter((line) => line.startsWith('C'))).toHaveLength(1);
  });

  it('loses no correction of many that change one dwell at once', async () => {
    const params = { stationId: station.stationId };
    const splits = await Promise.all(
      Array.from({ length: 20 }, (_, i) =>
        apply([
          { action: 'split', dwellId: ids[2]!, at: at(`20:${40 - i}:00`), antennaId: station.verticalId },
        ]),
      ),
    );
    const done = splits.filter((reply) => reply.status === 200);
    // A split later than one that came first lies outside of the part that keeps the id.
    expect(splits.filter((reply) => reply.status === 400)).toHaveLength(20 - done.length);
    expect(done.length).toBeGreaterThan(0);
    const { items } = (
      await api.call(listDwells, {
        params,
        token: operator.token,
        query: { from: at('18:30:00'), to: at('23:00:00') },
      })
    ).body as { items: DwellReply[] };
    expect(items).toHaveLength(done.length + 1);
    items.forEach((dwell, i) => expect(dwell.endsAt).toBe(items[i + 1]?.startsAt ?? null));
  });

  it('holds against a writer that takes no lock', async () => {
    const { stationId } = station;
    const runner = api.dataSource.createQueryRunner();
    await runner.startTransaction();
    // Their insert is not committed yet: our look for overlaps cannot see it.
    await runner.query(
      `INSERT INTO dwell (station_id, receiver_id, antenna_id, starts_at, ends_at, source) VALUES ($1, $2, $3, $4, $5, 'plan')`,
      [stationId, station.receiverIds[1], station.verticalId, at('19:00:00'), at('20:00:00')],
    );
    const waiting = apply([add('19:30:00', '20:30:00', 1)]);
    await waitForLock();
    await runner.commitTransaction();
    await runner.release();
    expect((await waiting).status).toBe(409);
    expect((await log()).filter((line) => line.startsWith('C'))).toEqual(['C Vertical 19:00:00-20:00:00']);
  });
});

/** Until some request waits for another's lock. */
async function waitForLock(): Promise<void> {
  for (;;) {
    const rows: unknown[] = await api.dataSource.query(
      `SELECT 1 FROM pg_stat_activity WHERE datname = current_database() AND wait_event_type = 'Lock'`,
    );
    if (rows.length > 0) return;
  }
}

describe('whose switch log it is', () => {
  it('answers 404 to receivers, antennas, dwells and batches of another station', async () => {
    const other = await insertLogStation(api.dataSource);
    const [foreignDwell] = await insertDwells(api.dataSource, other.stationId, [
      {
        ...{ receiverId: other.receiverIds[0], antennaId: other.verticalId },
        ...{ startMs: ms('18:00:00'), endMs: ms('19:00:00') },
      },
    ]);
    const dwellId = foreignDwell!;
    const own = { receiverId: station.receiverIds[1], antennaId: station.verticalId };
    const times = { startsAt: at('18:00:00'), endsAt: at('18:10:00'), note: '' };
    const changes: DwellChange[] = [
      { action: 'add', dwell: { ...own, ...times, receiverId: other.receiverIds[0] } },
      { action: 'add', dwell: { ...own, ...times, antennaId: other.verticalId } },
      { action: 'edit', dwellId, note: 'mine' },
      { action: 'edit', dwellId: ids[0]!, antennaId: other.verticalId },
      { action: 'split', dwellId, at: at('18:30:00'), antennaId: own.antennaId },
      { action: 'split', dwellId: ids[0]!, at: at('18:05:00'), antennaId: other.verticalId },
      { action: 'close', dwellId, at: at('18:30:00') },
      { action: 'delete', dwellId },
    ];
    const call = { params: { stationId: station.stationId }, token: operator.token };
    for (const change of changes) {
      const label = JSON.stringify(change);
      expect((await apply([change])).status, label).toBe(404);
      const preview = await api.call(previewDwellChanges, { ...call, body: { changes: [change] } });
      expect(preview.status, label).toBe(404);
    }
    const query = { from: at('00:00:00'), to: at('23:00:00') };
    expect((await api.call(listDwells, { ...call, query })).body).toMatchObject({ items: { length: 3 } });
    const theirs = { ...query, receiverId: other.receiverIds[0] };
    expect((await api.call(listDwells, { ...call, query: theirs })).status).toBe(404);

    const manager = await api.addPerson(other.stationId, 'manager');
    const foreign = await api.call(applyDwellChanges, {
      params: { stationId: other.stationId },
      token: manager.token,
      body: { changes: [{ action: 'delete', dwellId }] },
    });
    const { batchId } = foreign.body as { batchId: string };
    for (const id of [batchId, randomUUID()]) {
      const params = { stationId: station.stationId, batchId: id };
      expect((await api.call(undoDwellChange, { params, token: operator.token })).status).toBe(404);
    }
    expect(await log()).toEqual(asItWas);
  });

  it('is changed by managers, operators and analysts, and read by contesters', async () => {
    await insertSpots(api.dataSource, station.stationId, [
      { receiverId: station.receiverIds[0], timeMs: ms('18:05:00') },
    ]);
    for (const who of role.options) {
      const { token } = await api.addPerson(station.stationId, who);
      const call = { params: { stationId: station.stationId }, token };
      const body = { changes: [{ action: 'edit' as const, dwellId: ids[0]!, note: `seen by a ${who}` }] };
      const expected = who === 'contester' ? 403 : 200;
      expect((await api.call(previewDwellChanges, { ...call, body })).status, who).toBe(expected);
      expect((await api.call(applyDwellChanges, { ...call, body })).status, who).toBe(expected);
      const query = { from: at('18:00:00'), to: at('18:05:00') };
      const { items } = (await api.call(listDwells, { ...call, query })).body as { items: DwellReply[] };
      expect(items[0]?.note, who).toBe(`seen by a ${who === 'contester' ? 'analyst' : who}`);
    }
  });
});
