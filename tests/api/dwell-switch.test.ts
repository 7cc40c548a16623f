import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { listDwellHistory, listNowOn, switchReceiver } from '../../shared/contracts/dwell.ts';
import type { Dwell as DwellReply } from '../../shared/contracts/dwell.ts';
import type { BodyInput } from '../../shared/contracts/endpoint.ts';
import { makeToken } from '../../shared/contracts/token.ts';
import type { TokenScope } from '../../shared/contracts/permission.ts';
import { Antenna } from '../../server/database/entities/antenna.ts';
import { AuditEntry } from '../../server/database/entities/audit-entry.ts';
import { DirtyBlock } from '../../server/database/entities/dirty-block.ts';
import { Dwell } from '../../server/database/entities/dwell.ts';
import { Membership } from '../../server/database/entities/membership.ts';
import { Receiver } from '../../server/database/entities/receiver.ts';
import type { StationEvent } from '../../shared/contracts/event.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
import { insertDwells, insertLogStation, insertSpots } from '../helpers/switch-log-rows.ts';
import type { LogStation } from '../helpers/switch-log-rows.ts';

type SwitchBody = BodyInput<typeof switchReceiver>;
interface SwitchAnswer {
  dwell: DwellReply | null;
  changed: boolean;
  warning: string | null;
  detail: string;
  code: string;
}

let api: TestApi;
let manager: { token: string; userId: string };
let station: LogStation;
let nowMs: number;

beforeAll(async () => {
  api = await startTestApi();
  api.deps.now = () => nowMs;
  manager = await api.addPerson((await insertLogStation(api.dataSource)).stationId, 'manager');
});
afterAll(() => api.close());
beforeEach(async () => {
  nowMs = Date.UTC(2026, 10, 30, 22);
  station = await insertLogStation(api.dataSource);
  await api.dataSource
    .getRepository(Membership)
    .save({ stationId: station.stationId, userId: manager.userId, role: 'manager' });
});

async function switchTo(body: SwitchBody, token = manager.token) {
  const reply = await api.call(switchReceiver, { params: { stationId: station.stationId }, token, body });
  return { status: reply.status, ...(reply.body as SwitchAnswer) };
}
const log = () =>
  api.dataSource
    .getRepository(Dwell)
    .find({ where: { stationId: station.stationId }, order: { receiverId: 'ASC', startsAt: 'ASC' } });
const at = (clock: string) => `2026-11-30T${clock}Z`;

describe('logging what a receiver is now on', () => {
  it('ends the open dwell where the next one starts', async () => {
    const first = await switchTo({ receiver: 'EI7QSB', antenna: 'West', at: at('21:00:00') });
    expect(first).toMatchObject({ status: 200, changed: true, warning: null });
    expect(first.dwell).toMatchObject({
      ...{ receiverId: station.receiverIds[0], antennaId: station.antennaIds[1] },
      ...{ startsAt: '2026-11-30T21:00:00.000Z', endsAt: null, source: 'hand' },
    });
    nowMs = Date.UTC(2026, 10, 30, 22, 5, 7, 250);
    await switchTo({ receiver: station.receiverIds[0], antenna: station.verticalId });
    expect(
      (await log()).map((d) => [d.antennaId, d.startsAt.toISOString(), d.endsAt?.toISOString()]),
    ).toEqual([
      [station.antennaIds[1], '2026-11-30T21:00:00.000Z', '2026-11-30T22:05:07.250Z'],
      [station.verticalId, '2026-11-30T22:05:07.250Z', undefined],
    ]);
  });

  it('finds receiver and antenna by name in any letter case, and takes a name of digits for a name', async () => {
    const eighty = await api.dataSource
      .getRepository(Antenna)
      .save({ stationId: station.stationId, name: '80', marker: 'cross', kind: 'dipole' });
    expect((await switchTo({ receiver: 'ei7qsc', antenna: ' north-EAST ' })).dwell).toMatchObject({
      receiverId: station.receiverIds[1],
      antennaId: station.antennaIds[0],
    });
    expect((await switchTo({ receiver: 'EI7QSC', antenna: '80' })).dwell?.antennaId).toBe(eighty.id);
    expect(await switchTo({ receiver: 'EI7QSC', antenna: 'Loop 9' })).toMatchObject({
      status: 404,
      detail: 'An antenna named Loop 9 does not exist here.',
    });
    expect((await switchTo({ receiver: 'EI7QSZ', antenna: 'West' })).status).toBe(404);
  });

  it('logs nothing when the receiver is on that antenna already, however often it is told', async () => {
    const first = await switchTo({ receiver: 'EI7QSB', antenna: 'West', at: at('21:00:00') });
    const again = await switchTo({ receiver: 'EI7QSB', antenna: 'West', at: at('21:00:00') });
    const later = await switchTo({ receiver: 'EI7QSB', antenna: 'West' });
    for (const reply of [again, later]) {
      expect(reply).toMatchObject({ status: 200, changed: false });
      expect(reply.dwell).toEqual(first.dwell);
    }
    expect(await log()).toHaveLength(1);
    // A controller may say every second what it is on: that must not fill the audit trail.
    const audited = await api.dataSource.getRepository(AuditEntry).countBy({ stationId: station.stationId });
    expect(audited).toBe(1);
  });

  it('disconnects on null, once', async () => {
    await switchTo({ receiver: 'EI7QSB', antenna: 'West', at: at('21:00:00') });
    expect(await switchTo({ receiver: 'EI7QSB', antenna: null, at: at('21:30:00') })).toMatchObject({
      ...{ status: 200, changed: true, dwell: null },
    });
    expect(await switchTo({ receiver: 'EI7QSB', antenna: null })).toMatchObject({
      ...{ status: 200, changed: false, dwell: null },
    });
    expect((await log()).map((d) => d.endsAt?.toISOString())).toEqual(['2026-11-30T21:30:00.000Z']);
    expect((await switchTo({ receiver: 'EI7QSB', antenna: 'West', at: at('21:30:00') })).changed).toBe(true);
  });

  it('refuses a time inside the log with a sentence that names the dwell', async () => {
    await switchTo({ receiver: 'EI7QSB', antenna: 'West', at: at('21:00:00') });
    for (const clock of ['20:59:59', '21:00:00']) {
      expect(await switchTo({ receiver: 'EI7QSB', antenna: 'Vertical', at: at(clock) })).toMatchObject({
        status: 409,
        detail:
          `2026-11-30 ${clock}Z lies inside the log, which has EI7QSB on West from 2026-11-30 21:00:00Z on. ` +
          'Correct the log instead of switching.',
      });
    }
    await switchTo({ receiver: 'EI7QSB', antenna: null, at: at('21:30:00') });
    expect(await switchTo({ receiver: 'EI7QSB', antenna: 'Vertical', at: at('21:29:59.999') })).toMatchObject(
      {
        status: 409,
        detail:
          '2026-11-30 21:29:59.999Z lies inside the log, which has EI7QSB on West from 2026-11-30 21:00:00Z ' +
          'to 2026-11-30 21:30:00Z. Correct the log instead of switching.',
      },
    );
    expect(await log()).toHaveLength(1);
  });

  it('takes a time up to a minute ahead, and then keeps the order of what follows', async () => {
    expect(await switchTo({ receiver: 'EI7QSB', antenna: 'West', at: at('22:01:00.001') })).toMatchObject({
      status: 400,
      detail:
        '2026-11-30 22:01:00.001Z lies ahead: a switch is logged when it happens, at most a minute early.',
    });
    expect((await switchTo({ receiver: 'EI7QSB', antenna: 'West', at: at('22:01:00') })).status).toBe(200);
    const next = await switchTo({ receiver: 'EI7QSB', antenna: 'Vertical' });
    expect(next.dwell?.startsAt).toBe('2026-11-30T22:01:00.001Z');
  });

  it('says so when the log reaches further ahead than that', async () => {
    const [receiverId, antennaId] = [station.receiverIds[0], station.verticalId];
    const planned = { receiverId, antennaId, startMs: nowMs - 60_000, endMs: nowMs + 3_600_000 };
    await insertDwells(api.dataSource, station.stationId, [planned]);
    expect(await switchTo({ receiver: 'EI7QSB', antenna: 'West' })).toMatchObject({
      status: 409,
      detail:
        'The log reaches beyond now: it has EI7QSB on Vertical from 2026-11-30 21:59:00Z to 2026-11-30 23:00:00Z. ' +
        'Correct that dwell first.',
    });
  });

  it('refuses a retired receiver and what belongs to another station', async () => {
    const other = await insertLogStation(api.dataSource);
    expect((await switchTo({ receiver: other.receiverIds[0], antenna: 'West' })).status).toBe(404);
    expect((await switchTo({ receiver: 'EI7QSB', antenna: other.antennaIds[0] })).status).toBe(404);
    await api.dataSource
      .getRepository(Receiver)
      .update({ stationId: station.stationId, callSign: 'EI7QSB' }, { retiredAt: new Date(nowMs) });
    expect(await switchTo({ receiver: 'EI7QSB', antenna: 'West' })).toMatchObject({
      status: 409,
      detail: 'EI7QSB is retired: it is on no antenna.',
    });
    expect(await log()).toEqual([]);
  });

  it('logs an antenna outside its dates of service and warns', async () => {
    await api.dataSource
      .getRepository(Antenna)
      .update({ stationId: station.stationId, name: 'West' }, { inServiceTo: '2026-11-01' });
    expect(await switchTo({ receiver: 'EI7QSB', antenna: 'West', at: at('21:00:00') })).toMatchObject({
      status: 200,
      changed: true,
      warning:
        'West was in service to 2026-11-01: EI7QSB on West from 2026-11-30 21:00:00Z on lies outside of that.',
    });
  });

  it('gives simultaneous switches one after the other, without overlap or loss', async () => {
    const names = ['North-east', 'West', 'Vertical'];
    const replies = await Promise.all(
      Array.from({ length: 40 }, (_, i) =>
        switchTo({ receiver: i % 2 === 0 ? 'EI7QSB' : 'EI7QSC', antenna: names[(i >> 1) % 3]! }),
      ),
    );
    expect(replies.map((reply) => reply.status)).toEqual(Array.from({ length: 40 }, () => 200));
    const dwells = await log();
    expect(dwells).toHaveLength(replies.filter((reply) => reply.changed).length);
    for (const receiverId of station.receiverIds) {
      const own = dwells.filter((dwell) => dwell.receiverId === receiverId);
      expect(own.length).toBeGreaterThan(5);
      own.forEach((dwell, i) => {
        // Each ends exactly where the next starts: no switch was written over another.
        expect(dwell.endsAt?.getTime()).toBe(own[i + 1]?.startsAt.getTime());
        expect(dwell.antennaId).not.toBe(own[i + 1]?.antennaId);
      });
    }
  });

  it('marks the hours that change from the switch on, and tells whoever listens', async () => {
    await switchTo({ receiver: 'EI7QSB', antenna: 'West', at: at('05:00:00') });
    const spots = [6, 14, 20].map((hour) => ({
      receiverId: station.receiverIds[0],
      timeMs: Date.UTC(2026, 10, 30, hour, 30),
    }));
    await insertSpots(api.dataSource, station.stationId, spots);
    const heard = new Promise<StationEvent>((resolve) => {
      const stop = api.deps.eventHub.subscribe(station.stationId, (event) => {
        stop();
        resolve(event);
      });
    });
    await switchTo({ receiver: 'EI7QSB', antenna: 'Vertical', at: at('20:10:00') });
    expect(await heard).toEqual({ type: 'switch', receiverIds: [station.receiverIds[0]] });
    const marked = await api.dataSource
      .getRepository(DirtyBlock)
      .find({ where: { stationId: station.stationId }, order: { startsAt: 'ASC' } });
    // 20:10 less the longest uncertainty and the reach of pairing is 19:50; the night of the last spot ends
    // at 12:36 solar time's UTC, in the hour of 12.
    const hours = marked.map((row) => row.startsAt.toISOString().slice(5, 13));
    expect(hours[0]).toBe('11-30T19');
    expect(hours.at(-1)).toBe('12-01T12');
    expect(hours).toHaveLength(18);
  });
});

describe('a switch controller with an API token', () => {
  async function tokenWith(scopes: TokenScope[]) {
    const made = await api.call(makeToken, {
      params: { stationId: station.stationId },
      token: manager.token,
      body: { name: 'Relay box', scopes, days: 30 },
    });
    return (made.body as { secret: string }).secret;
  }

  it('logs switches under its own name', async () => {
    const secret = await tokenWith(['dwell:write']);
    expect((await switchTo({ receiver: 'EI7QSB', antenna: 'West' }, secret)).dwell?.source).toBe('token');
    const history = await api.call(listDwellHistory, {
      params: { stationId: station.stationId },
      token: manager.token,
    });
    expect((history.body as { items: { who: string }[] }).items[0]?.who).toBe('API token Relay box');
    const entry = await api.dataSource
      .getRepository(AuditEntry)
      .findOneByOrFail({ stationId: station.stationId, action: 'dwell.switch' });
    expect(entry).toMatchObject({
      userId: null,
      detail: { receiver: 'EI7QSB', antenna: 'West', at: '2026-11-30 22:00:00Z' },
    });
  });

  it('cannot switch with a scope to read only, nor at another station', async () => {
    const readOnly = await tokenWith(['dwell:read', 'spot:read']);
    expect((await switchTo({ receiver: 'EI7QSB', antenna: 'West' }, readOnly)).status).toBe(403);
    const now = await api.call(listNowOn, { params: { stationId: station.stationId }, token: readOnly });
    expect(now.body).toEqual({
      items: station.receiverIds.map((receiverId) => ({ receiverId, dwell: null })),
    });
    const secret = await tokenWith(['dwell:write']);
    station = await insertLogStation(api.dataSource);
    expect((await switchTo({ receiver: 'EI7QSB', antenna: 'West' }, secret)).status).toBe(404);
    expect((await switchTo({ receiver: 'EI7QSB', antenna: 'West' }, `wwk_${randomUUID()}`)).status).toBe(401);
  });
});
