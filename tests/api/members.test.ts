import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { readProfile } from '../../shared/contracts/auth.ts';
import { listDwells, switchReceiver } from '../../shared/contracts/dwell.ts';
import type { Role, TokenScope } from '../../shared/contracts/permission.ts';
import { listSpots } from '../../shared/contracts/spot.ts';
import { listAntennas } from '../../shared/contracts/antenna.ts';
import { listAudit } from '../../shared/contracts/audit.ts';
import { changeMemberRole, inviteMember, listMembers, removeMember } from '../../shared/contracts/member.ts';
import { listTokens, makeToken, revokeToken } from '../../shared/contracts/token.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi, TestReply } from '../helpers/api.ts';
import { insertStation } from '../helpers/station-rows.ts';

type Person = Awaited<ReturnType<TestApi['addPerson']>>;

let api: TestApi;
let station: Awaited<ReturnType<typeof insertStation>>;
let params: { stationId: number };
let manager: Person;

beforeAll(async () => {
  api = await startTestApi();
});
afterAll(() => api.close());
beforeEach(async () => {
  station = await insertStation(api.dataSource);
  params = { stationId: station.stationId };
  manager = await api.addPerson(station.stationId, 'manager');
});

const detailOf = (reply: TestReply) => (reply.body as { detail: string }).detail;
const members = async (token = manager.token) =>
  listMembers.reply.parse((await api.call(listMembers, { params, token })).body).members;
const setRole = (who: Person, role: Role, by = manager) =>
  api.call(changeMemberRole, { params: { ...params, userId: who.userId }, body: { role }, token: by.token });
const remove = (who: Person, by = manager) =>
  api.call(removeMember, { params: { ...params, userId: who.userId }, token: by.token });
const lastManager = 'This is the last manager of the station. Make somebody else manager first.';

describe('members', () => {
  it('are listed by name with their role, to managers only', async () => {
    const operator = await api.addPerson(station.stationId, 'operator');
    expect((await members()).map((m) => [m.email, m.role])).toEqual([
      [manager.email, 'manager'],
      [operator.email, 'operator'],
    ]);
    expect((await api.call(listMembers, { params, token: operator.token })).status).toBe(403);
  });

  it('get another role at once: what they hold ends, and signing in again brings the new one', async () => {
    const operator = await api.addPerson(station.stationId, 'operator');
    expect((await setRole(operator, 'contester')).status).toBe(200);
    const read = (token: string) => api.call(listAntennas, { params, token });
    expect((await read(operator.token)).status).toBe(401);
    const token = await api.signIn(operator.email);
    expect((await read(token)).status).toBe(200);
    const switching = await api.call(switchReceiver, {
      params,
      body: { receiver: station.receiverId, antenna: station.antennaIds[0] },
      token,
    });
    expect(switching.status).toBe(403);
  });

  it('keep their sessions when the role given is the one they have', async () => {
    const operator = await api.addPerson(station.stationId, 'operator');
    expect((await setRole(operator, 'operator')).status).toBe(200);
    expect((await api.call(readProfile, { token: operator.token })).status).toBe(200);
  });

  it('lose the station at once when removed, and nothing elsewhere', async () => {
    const elsewhere = await insertStation(api.dataSource);
    const operator = await api.addPerson(station.stationId, 'operator');
    await api.dataSource.query(
      `INSERT INTO membership (station_id, user_id, role) VALUES ($1, $2, 'analyst')`,
      [elsewhere.stationId, operator.userId],
    );
    expect((await remove(operator)).status).toBe(204);
    expect((await api.call(listAntennas, { params, token: operator.token })).status).toBe(401);
    const token = await api.signIn(operator.email);
    expect((await api.call(listAntennas, { params, token })).status).toBe(404);
    expect((await api.call(listAntennas, { params: { stationId: elsewhere.stationId }, token })).status).toBe(
      200,
    );
    expect((await members()).map((m) => m.email)).toEqual([manager.email]);
    expect((await remove(operator)).status).toBe(404);
    expect((await setRole(operator, 'analyst')).status).toBe(404);
  });

  it('always have a manager among them', async () => {
    for (const reply of [await setRole(manager, 'analyst'), await remove(manager)]) {
      expect([reply.status, detailOf(reply)]).toEqual([409, lastManager]);
    }
    expect((await members()).map((m) => m.role)).toEqual(['manager']);
    // Somebody who cannot sign in any more is no manager to rely on.
    const disabled = await api.addPerson(station.stationId, 'manager');
    await api.dataSource.query('UPDATE app_user SET disabled_at = now() WHERE id = $1', [disabled.userId]);
    expect((await setRole(manager, 'analyst')).status).toBe(409);
    await api.addPerson(station.stationId, 'manager');
    expect((await setRole(manager, 'analyst')).status).toBe(200);
  });

  it.each([
    ['step down', (a: Person, b: Person) => [setRole(a, 'analyst', a), setRole(b, 'analyst', b)]],
    ['remove each other', (a: Person, b: Person) => [remove(b, a), remove(a, b)]],
    ['demote each other', (a: Person, b: Person) => [setRole(b, 'operator', a), setRole(a, 'operator', b)]],
  ] as const)('keep one manager when two %s at the same moment', async (_what, both) => {
    for (let round = 0; round < 5; round += 1) {
      const other = await api.addPerson(station.stationId, 'manager');
      const replies = await Promise.all(both(manager, other));
      const worked = replies.filter((r) => r.status === 200 || r.status === 204);
      expect(worked).toHaveLength(1);
      const rows: { user_id: string }[] = await api.dataSource.query(
        `SELECT user_id FROM membership WHERE station_id = $1 AND role = 'manager'`,
        [station.stationId],
      );
      expect(rows).toHaveLength(1);
      const left = rows[0]!.user_id === manager.userId ? manager : other;
      manager = { ...left, token: await api.signIn(left.email) };
    }
  });

  it('leave their doings in the audit trail, newest first, of this station only', async () => {
    const elsewhere = await insertStation(api.dataSource);
    const stranger = await api.addPerson(elsewhere.stationId, 'manager');
    await api.call(inviteMember, {
      params: { stationId: elsewhere.stationId },
      body: { email: 'elsewhere@station.example', role: 'operator' },
      token: stranger.token,
    });
    const operator = await api.addPerson(station.stationId, 'operator');
    await setRole(operator, 'analyst');
    await remove(operator);
    await remove(manager);
    const reply = await api.call(listAudit, { params, token: manager.token });
    const { items, next } = listAudit.reply.parse(reply.body);
    expect(next).toBeNull();
    expect(items.map(({ action, target, detail }) => ({ action, target, detail }))).toEqual([
      { action: 'member.remove', target: operator.userId, detail: {} },
      {
        action: 'member.change-role',
        target: operator.userId,
        detail: { from: 'operator', to: 'analyst' },
      },
    ]);
    expect((await api.call(listAudit, { params, query: { after: 'x' }, token: manager.token })).status).toBe(
      400,
    );
  });

  it('cannot have their doings changed in the trail, by anybody', async () => {
    await setRole(await api.addPerson(station.stationId, 'operator'), 'analyst');
    await expect(api.dataSource.query(`UPDATE audit_entry SET action = 'nothing'`)).rejects.toThrow(/audit/);
    await expect(api.dataSource.query('DELETE FROM audit_entry')).rejects.toThrow(/audit/);
  });
});

describe('API tokens', () => {
  const make = async (scopes: TokenScope[], days = 30) => {
    const reply = await api.call(makeToken, {
      params,
      body: { name: 'Switch box', scopes, days },
      token: manager.token,
    });
    expect(reply.status).toBe(201);
    return makeToken.reply.parse(reply.body);
  };
  const use = (token: string) =>
    api.call(switchReceiver, {
      params,
      body: { receiver: 'ei7qsb', antenna: 'North-east' },
      token,
    });
  const night = { from: '2026-11-30T12:00:00Z', to: '2026-12-01T12:00:00Z' };
  const tokens = async () =>
    listTokens.reply.parse((await api.call(listTokens, { params, token: manager.token })).body).items;

  it('do what their scope names and nothing else, and note their use', async () => {
    const { secret, token } = await make(['dwell:write']);
    expect(secret).toMatch(/^wwk_[\w-]{43}$/);
    expect((await tokens())[0]).toMatchObject({ id: token.id, lastUsedAt: null, scopes: ['dwell:write'] });
    expect((await use(secret)).status).toBe(200);
    const reading = await api.call(listDwells, { params, query: night, token: secret });
    expect([reading.status, detailOf(reading)]).toEqual([403, 'This API token has no scope for this.']);
    expect((await api.call(listSpots, { params, query: night, token: secret })).status).toBe(403);
    expect((await api.call(listMembers, { params, token: secret })).status).toBe(403);
    expect((await tokens())[0]!.lastUsedAt).toMatch(/Z$/);
    const reader = await make(['dwell:read', 'spot:read']);
    expect((await api.call(listDwells, { params, query: night, token: reader.secret })).status).toBe(200);
    expect((await api.call(listSpots, { params, query: night, token: reader.secret })).status).toBe(200);
    expect((await use(reader.secret)).status).toBe(403);
  });

  it('never show their secret again, nor to anybody but managers', async () => {
    const { secret } = await make(['dwell:read']);
    const listed = await api.call(listTokens, { params, token: manager.token });
    expect(listed.text).not.toContain(secret);
    const operator = await api.addPerson(station.stationId, 'operator');
    expect((await api.call(listTokens, { params, token: operator.token })).status).toBe(403);
  });

  it('cannot act for a person, nor at another station', async () => {
    const { secret } = await make(['dwell:write', 'dwell:read', 'spot:read']);
    const me = await api.call(readProfile, { token: secret });
    expect([me.status, detailOf(me)]).toEqual([403, 'API tokens cannot act for a person.']);
    const elsewhere = await insertStation(api.dataSource);
    const there = { stationId: elsewhere.stationId };
    expect((await api.call(listDwells, { params: there, query: night, token: secret })).status).toBe(404);
  });

  it('stop at once when revoked, and when their days are over', async () => {
    const { secret, token } = await make(['dwell:write']);
    expect((await use(secret)).status).toBe(200);
    const revoke = () =>
      api.call(revokeToken, { params: { ...params, tokenId: token.id }, token: manager.token });
    expect((await revoke()).status).toBe(204);
    expect([(await use(secret)).status, detailOf(await use(secret))]).toEqual([
      401,
      'This API token is unknown, expired or revoked.',
    ]);
    const first = (await tokens())[0]!.revokedAt;
    expect((await revoke()).status).toBe(204);
    expect((await tokens())[0]!.revokedAt).toBe(first);
    const late = await make(['dwell:write'], 1);
    const hours = (Date.parse(late.token.expiresAt) - Date.now()) / 3_600_000;
    expect(hours).toBeGreaterThan(23.9);
    expect(hours).toBeLessThanOrEqual(24);
    await api.dataSource.query(
      `UPDATE api_token SET expires_at = now() - interval '1 second' WHERE id = $1`,
      [late.token.id],
    );
    expect((await use(late.secret)).status).toBe(401);
    expect((await use('wwk_unknown')).status).toBe(401);
  });

  it('sign what they do in the audit trail with their name', async () => {
    const { secret } = await make(['dwell:write']);
    await use(secret);
    const { items } = listAudit.reply.parse(
      (await api.call(listAudit, { params, token: manager.token })).body,
    );
    expect(items.map((e) => e.who)).toEqual(['API token Switch box', expect.stringMatching(/^manager/)]);
    expect(items[1]).toMatchObject({
      action: 'token.make',
      detail: { name: 'Switch box', scopes: ['dwell:write'] },
    });
  });

  it('are refused with the field named when nothing may be done with them or for too long', async () => {
    const reply = await api.call(makeToken, {
      params,
      body: { name: ' ', scopes: [], days: 731 },
      token: manager.token,
    });
    expect([reply.status, (reply.body as { errors: unknown }).errors]).toEqual([
      400,
      [
        { path: 'body.name', message: 'This cannot be empty.' },
        { path: 'body.scopes', message: 'Choose at least one scope.' },
        { path: 'body.days', message: 'Give a number from 1 to 730.' },
      ],
    ]);
  });
});
