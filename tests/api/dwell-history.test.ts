import { parse } from 'csv-parse/sync';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import {
  applyDwellChanges,
  exportDwells,
  listDwellHistory,
  switchReceiver,
  undoDwellChange,
} from '../../shared/contracts/dwell.ts';
import type { DwellChange } from '../../shared/contracts/dwell.ts';
import { Antenna } from '../../server/database/entities/antenna.ts';
import { AuditEntry } from '../../server/database/entities/audit-entry.ts';
import { DwellChange as StoredChange } from '../../server/database/entities/dwell-change.ts';
import { Dwell } from '../../server/database/entities/dwell.ts';
import { User } from '../../server/database/entities/user.ts';
import { Membership } from '../../server/database/entities/membership.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
import { insertDwells, insertLogStation } from '../helpers/switch-log-rows.ts';
import type { LogStation } from '../helpers/switch-log-rows.ts';

interface Entry {
  batchId: string;
  who: string;
  action: string;
  summary: string;
  dwellCount: number;
  canUndo: boolean;
}

let api: TestApi;
let operator: { token: string; userId: string };
let station: LogStation;
let ids: number[];
const at = (clock: string) => `2026-11-30T${clock}Z`;
const ms = (clock: string) => Date.parse(at(clock));

beforeAll(async () => {
  api = await startTestApi();
  api.deps.now = () => ms('22:00:00');
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
  ]);
});

const call = () => ({ params: { stationId: station.stationId }, token: operator.token });
async function apply(...changes: DwellChange[]): Promise<string> {
  const reply = await api.call(applyDwellChanges, { ...call(), body: { changes } });
  expect(reply.status, reply.text).toBe(200);
  return (reply.body as { batchId: string }).batchId;
}
async function undo(batchId: string) {
  const params = { stationId: station.stationId, batchId };
  const reply = await api.call(undoDwellChange, { params, token: operator.token });
  return { status: reply.status, ...(reply.body as { batchId: string; detail: string }) };
}
async function history(query: { after?: string; limit?: number } = {}) {
  const reply = await api.call(listDwellHistory, { ...call(), query });
  expect(reply.status, reply.text).toBe(200);
  return reply.body as { items: Entry[]; next: string | null };
}
const stored = () =>
  api.dataSource.getRepository(Dwell).find({ where: { stationId: station.stationId }, order: { id: 'ASC' } });
const adding = (startsAt: string, endsAt: string): DwellChange => ({
  action: 'add',
  dwell: {
    ...{ receiverId: station.receiverIds[0], antennaId: station.verticalId, note: '' },
    ...{ startsAt: at(startsAt), endsAt: at(endsAt) },
  },
});

describe('the history of the switch log', () => {
  it('tells each change in a sentence, newest first, with who made it', async () => {
    await apply(adding('19:00:00', '19:05:00'));
    await apply({
      ...{ action: 'edit', dwellId: ids[0]!, antennaId: station.verticalId, startsAt: at('18:01:00') },
      note: 'read off the recorder',
    });
    await apply({ action: 'split', dwellId: ids[1]!, at: at('18:15:00'), antennaId: station.verticalId });
    await apply({ action: 'delete', dwellId: ids[1]! });
    await apply(adding('19:10:00', '19:15:00'), { action: 'delete', dwellId: ids[0]! });
    for (const [antenna, clock] of [
      ['West', '21:00:00'],
      ['Vertical', '21:30:00.250'],
      [null, '21:40:00'],
    ] as const) {
      await api.call(switchReceiver, { ...call(), body: { receiver: 'EI7QSB', antenna, at: at(clock) } });
    }
    const { items, next } = await history();
    expect(next).toBeNull();
    expect(items.map((entry) => `${entry.action}: ${entry.summary}`)).toEqual([
      'close: Closed EI7QSB on Vertical at 2026-11-30 21:40:00Z.',
      'switch: EI7QSB switched from West to Vertical at 2026-11-30 21:30:00.250Z.',
      'add: Added EI7QSB on West from 2026-11-30 21:00:00Z on.',
      'several: 1 added, 1 deleted on EI7QSB, from 2026-11-30 18:01:00Z to 2026-11-30 19:15:00Z.',
      'delete: Deleted EI7QSB on West from 2026-11-30 18:10:00Z to 2026-11-30 18:15:00Z.',
      'split: Split EI7QSB on West from 2026-11-30 18:10:00Z to 2026-11-30 18:20:00Z at 2026-11-30 18:15:00Z: Vertical after it.',
      'edit: Changed EI7QSB on North-east from 2026-11-30 18:00:00Z to 2026-11-30 18:10:00Z: antenna now Vertical, start now 2026-11-30 18:01:00Z, note changed.',
      'add: Added EI7QSB on Vertical from 2026-11-30 19:00:00Z to 2026-11-30 19:05:00Z.',
    ]);
    expect(new Set(items.map((entry) => entry.who))).toEqual(new Set(['operator 1']));
    expect(items.map((entry) => entry.dwellCount)).toEqual([1, 2, 1, 2, 1, 2, 1, 1]);
    // What later changes touched again cannot be taken back before them.
    expect(items.map((entry) => entry.canUndo)).toEqual([true, false, false, true, true, false, false, true]);
  });

  it('comes in pages that join without a gap or a repeat', async () => {
    for (let minute = 10; minute < 23; minute++) await apply(adding(`19:${minute}:00`, `19:${minute}:30`));
    const whole = (await history()).items.map((entry) => entry.batchId);
    const paged: string[] = [];
    let after: string | undefined;
    for (let pages = 0; pages < 4; pages++) {
      const page = await history({ limit: 5, ...(after === undefined ? {} : { after }) });
      paged.push(...page.items.map((entry) => entry.batchId));
      if (page.next === null) break;
      after = page.next;
    }
    expect(whole).toHaveLength(13);
    expect(paged).toEqual(whole);
  });

  it('counts an import instead of spelling it out, and leaves its undo to the imports', async () => {
    const batchId = '5b0f6a0e-8a70-4a3e-9f0c-0d4a1b7c2e11';
    const rows = ids.map((dwellId) => ({ dwellId, action: 'import' as const, before: null, after: null }));
    await api.dataSource
      .getRepository(StoredChange)
      .save(rows.map((row) => ({ stationId: station.stationId, batchId, ...row })));
    expect((await history()).items).toMatchObject([
      { batchId, action: 'import', summary: 'Import of a file: 2 dwells.', canUndo: false },
    ]);
    expect((await undo(batchId)).detail).toBe('An import is taken back as a whole, under Imports.');
  });
});

describe('taking back a change of the switch log', () => {
  it('puts every dwell back as it was, under its own id, and can itself be taken back', async () => {
    const before = await stored();
    const batchId = await apply(
      { action: 'edit', dwellId: ids[0]!, note: 'wrong', endsAt: at('18:05:00') },
      { action: 'delete', dwellId: ids[1]! },
      adding('18:05:00', '18:15:00'),
    );
    const changed = await stored();
    const undone = await undo(batchId);
    expect(undone.status).toBe(200);
    expect(await stored()).toEqual(before);
    const [entry] = (await history()).items;
    expect(entry).toMatchObject({
      action: 'undo',
      summary:
        'Took a change back: 1 added, 1 changed, 1 deleted on EI7QSB, from 2026-11-30 18:00:00Z to 2026-11-30 18:20:00Z.',
    });
    expect((await undo(undone.batchId)).status).toBe(200);
    expect(await stored()).toEqual(changed);
    expect(
      await api.dataSource
        .getRepository(AuditEntry)
        .countBy({ stationId: station.stationId, action: 'dwell.undo' }),
    ).toBe(2);
  });

  it('refuses when a later change touches the same dwell, and works after that one is taken back', async () => {
    const first = await apply({ action: 'edit', dwellId: ids[0]!, endsAt: at('18:05:00') });
    const second = await apply({ action: 'edit', dwellId: ids[0]!, note: 'later' });
    expect(await undo(first)).toMatchObject({
      status: 409,
      detail:
        'This change cannot be taken back: a later one touches the same dwell, EI7QSB on North-east ' +
        'from 2026-11-30 18:00:00Z to 2026-11-30 18:05:00Z. Take the later one back first.',
    });
    expect((await undo(second)).status).toBe(200);
    expect((await undo(first)).status).toBe(200);
    // Twice is once too often: the dwell is no longer as the change left it.
    expect((await undo(first)).status).toBe(409);
  });

  it('refuses when a later change fills the time that would be needed, and says with what', async () => {
    const batchId = await apply({ action: 'delete', dwellId: ids[1]! });
    await apply(adding('18:12:00', '18:14:00'));
    expect((await history()).items.map((entry) => entry.canUndo)).toEqual([true, false]);
    expect(await undo(batchId)).toMatchObject({
      status: 409,
      detail:
        'Two antennas at once cannot be: EI7QSB on West from 2026-11-30 18:10:00Z to 2026-11-30 18:20:00Z would ' +
        'overlap EI7QSB on Vertical from 2026-11-30 18:12:00Z to 2026-11-30 18:14:00Z. Shorten or delete one of them.',
    });
  });

  it('refuses when the antenna has been removed since', async () => {
    const batchId = await apply(
      { action: 'delete', dwellId: ids[1]! },
      { action: 'delete', dwellId: ids[0]! },
    );
    await api.dataSource.getRepository(Antenna).delete({ stationId: station.stationId, name: 'West' });
    expect((await history()).items[0]?.canUndo).toBe(false);
    expect((await undo(batchId)).detail).toMatch(
      /^This change cannot be taken back: the antenna of EI7QSB on antenna \d+ \(removed\) from 2026-11-30 18:10:00Z to 2026-11-30 18:20:00Z has been removed since\.$/,
    );
  });

  it('restores a dwell whose maker has left', async () => {
    const { stationId } = station;
    const guest = await api.addPerson(stationId, 'analyst');
    const made = await api.call(applyDwellChanges, {
      ...call(),
      token: guest.token,
      body: { changes: [adding('19:00:00', '19:05:00')] },
    });
    const dwellId = (made.body as { dwells: { id: number }[] }).dwells[0]!.id;
    const batchId = await apply({ action: 'delete', dwellId });
    await api.dataSource.getRepository(User).delete({ id: guest.userId });
    expect((await undo(batchId)).status).toBe(200);
    expect(
      await api.dataSource.getRepository(Dwell).findOneByOrFail({ stationId, id: dwellId }),
    ).toMatchObject({ createdBy: null });
    expect((await history()).items.map((entry) => entry.who)).toEqual([
      ...['operator 1', 'operator 1'],
      'somebody who has left',
    ]);
  });
});

describe('the switch log as CSV', () => {
  it('gives the columns that an import takes, in order of time, and runs no formula', async () => {
    await apply(
      {
        action: 'add',
        dwell: {
          ...{ receiverId: station.receiverIds[1], antennaId: station.verticalId },
          ...{ startsAt: at('18:05:00.500'), endsAt: null, note: '=1+1, "quoted"' },
        },
      },
      { action: 'edit', dwellId: ids[1]!, note: 'two\nlines' },
    );
    const reply = await api.call(exportDwells, call());
    expect(reply.headers.get('content-type')).toBe('text/csv; charset=utf-8');
    expect(reply.headers.get('content-disposition')).toBe('attachment; filename="switch-log.csv"');
    // Read by an independent CSV parser.
    expect(parse(reply.text, {})).toEqual([
      ['receiver', 'antenna', 'starts_at', 'ends_at', 'note'],
      ['EI7QSB', 'North-east', '2026-11-30T18:00:00.000Z', '2026-11-30T18:10:00.000Z', ''],
      ['EI7QSC', 'Vertical', '2026-11-30T18:05:00.500Z', '', `'=1+1, "quoted"`],
      ['EI7QSB', 'West', '2026-11-30T18:10:00.000Z', '2026-11-30T18:20:00.000Z', 'two\nlines'],
    ]);
    const part = await api.call(exportDwells, {
      ...call(),
      query: { from: at('18:10:00'), to: at('18:11:00') },
    });
    expect(parse(part.text, {}).map((cells) => cells[1])).toEqual(['antenna', 'Vertical', 'West']);
    const turned = { from: at('18:10:00'), to: at('18:10:00') };
    const refused = await api.call(exportDwells, { ...call(), query: turned });
    expect(refused.status).toBe(400);
    expect(refused.headers.get('content-type')).toContain('application/problem+json');
  });

  it('streams more dwells than are read at once, each exactly once', async () => {
    const { stationId, receiverIds, antennaIds } = station;
    await api.dataSource.query(
      `INSERT INTO dwell (station_id, receiver_id, antenna_id, starts_at, ends_at, source)
       SELECT $1, receiver, $3, '2026-12-01'::timestamptz + n * interval '1 minute',
         '2026-12-01'::timestamptz + (n + 1) * interval '1 minute', 'plan'
       FROM generate_series(0, 6499) AS n, unnest($2::int[]) AS receiver`,
      [stationId, receiverIds, antennaIds[0]],
    );
    const lines = parse((await api.call(exportDwells, call())).text, {}).slice(1);
    expect(lines).toHaveLength(13_002);
    expect(new Set(lines.map((cells) => `${cells[0]} ${cells[2]}`)).size).toBe(13_002);
    expect(lines.map((cells) => cells[2])).toEqual(lines.map((cells) => cells[2]).sort());
  });
});
