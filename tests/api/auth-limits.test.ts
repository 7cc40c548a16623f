import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import * as contract from '../../shared/contracts/auth.ts';
import { listAudit } from '../../shared/contracts/audit.ts';
import { inviteMember } from '../../shared/contracts/member.ts';
import { makeToken } from '../../shared/contracts/token.ts';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { callerAddress, createRateLimits } from '../../server/middleware/rate-limit.ts';
import { createLogger } from '../../server/platform/logger.ts';
import { callApi, startServer, startTestApi, testPassword } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
import { insertStation } from '../helpers/station-rows.ts';

let api: TestApi;
let stationId: number;
let tests = 0;

beforeAll(async () => {
  api = await startTestApi();
  stationId = (await insertStation(api.dataSource)).stationId;
});
afterAll(() => api.close());
beforeEach(() => {
  tests += 1;
});

const from = (host: number) => ({ 'x-forwarded-for': `10.7.${tests}.${host}` });
const signIn = (email: string, password: string, host: number, url = api.url) =>
  callApi(url, contract.signIn, { body: { email, password }, headers: from(host) });

async function statuses(times: number, call: () => Promise<{ status: number }>): Promise<number[]> {
  const seen: number[] = [];
  for (let i = 0; i < times; i += 1) seen.push((await call()).status);
  return seen;
}

describe('rate limits', () => {
  it('stop guesses at one account from one address, and say how long to wait', async () => {
    const { email } = await api.addPerson(stationId, 'operator');
    expect(await statuses(6, () => signIn(email, 'a guess', 1))).toEqual([401, 401, 401, 401, 401, 401]);
    const stopped = await signIn(email, testPassword, 1);
    expect(stopped.status).toBe(429);
    const wait = Number(stopped.headers.get('retry-after'));
    expect(wait).toBeGreaterThan(800);
    expect(wait).toBeLessThanOrEqual(900);
    expect(stopped.body).toMatchObject({
      code: 'too-many',
      detail: `Too many tries. Wait ${wait} seconds and try again.`,
    });
  });

  it('lock out neither the owner at another address nor another account at the same address', async () => {
    const victim = await api.addPerson(stationId, 'operator');
    const neighbour = await api.addPerson(stationId, 'operator');
    await statuses(7, () => signIn(victim.email, 'a guess', 1));
    expect((await signIn(victim.email, testPassword, 1)).status).toBe(429);
    expect((await signIn(victim.email, testPassword, 2)).status).toBe(200);
    expect((await signIn(neighbour.email, testPassword, 1)).status).toBe(200);
  });

  it('forget the failures of who gets it right', async () => {
    const { email } = await api.addPerson(stationId, 'operator');
    await statuses(5, () => signIn(email, 'a guess', 1));
    expect((await signIn(email, testPassword, 1)).status).toBe(200);
    expect(await statuses(5, () => signIn(email, 'a guess', 1))).toEqual([401, 401, 401, 401, 401]);
  });

  it('do not let simultaneous guesses past', async () => {
    const { email } = await api.addPerson(stationId, 'operator');
    const replies = await Promise.all(Array.from({ length: 12 }, () => signIn(email, 'a guess', 1)));
    expect(replies.filter((r) => r.status === 401)).toHaveLength(6);
    expect(replies.filter((r) => r.status === 429)).toHaveLength(6);
  });

  it('treat an unknown address like a known one', async () => {
    expect(await statuses(7, () => signIn('nobody@station.example', 'a guess', 1))).toEqual([
      401, 401, 401, 401, 401, 401, 429,
    ]);
  });

  it('are shared by two server processes over one database', async () => {
    const { email } = await api.addPerson(stationId, 'operator');
    const dataSource = await connectDataSource(createDataSource({ url: api.databaseUrl, poolSize: 4 }));
    const second = await startServer({
      ...api.deps,
      dataSource,
      rateLimits: createRateLimits(dataSource),
    });
    try {
      expect(await statuses(3, () => signIn(email, 'a guess', 1))).toEqual([401, 401, 401]);
      expect(await statuses(3, () => signIn(email, 'a guess', 1, second.url))).toEqual([401, 401, 401]);
      expect((await signIn(email, testPassword, 1)).status).toBe(429);
      expect((await signIn(email, testPassword, 1, second.url)).status).toBe(429);
    } finally {
      await second.stop();
      await dataSource.destroy();
    }
  });

  it('stop floods of reset messages, link guesses, invitations and tokens', async () => {
    const ask = () =>
      api.call(contract.askPasswordReset, { body: { email: 'nobody@station.example' }, headers: from(1) });
    expect((await statuses(11, ask)).slice(9)).toEqual([204, 429]);
    const guess = () =>
      api.call(contract.readInvitation, { body: { token: 'x'.repeat(43) }, headers: from(1) });
    expect((await statuses(31, guess)).slice(29)).toEqual([400, 429]);
    const manager = await api.addPerson(stationId, 'manager');
    const params = { stationId };
    let n = 0;
    const invite = () =>
      api.call(inviteMember, {
        params,
        body: { email: `flood${(n += 1)}@station.example`, role: 'contester' },
        token: manager.token,
      });
    expect((await statuses(41, invite)).slice(39)).toEqual([201, 429]);
    const make = () =>
      api.call(makeToken, { params, body: { name: 'Flood', scopes: ['spot:read'] }, token: manager.token });
    expect((await statuses(41, make)).slice(39)).toEqual([201, 429]);
    const other = await api.addPerson(stationId, 'manager');
    const otherMakes = await api.call(makeToken, {
      params,
      body: { name: 'Switch', scopes: ['dwell:write'] },
      token: other.token,
    });
    expect(otherMakes.status).toBe(201);
  });

  it('count an IPv6 caller by the network of 64 bits, however the address is written', () => {
    const network = callerAddress('2001:db8::1');
    expect(network).toBe('2001:db8:0:0');
    for (const same of ['2001:db8::2', '2001:DB8::ffff:1', '2001:db8:0:0:1:2:3:4', '2001:0db8:0000::7'])
      expect(callerAddress(same), same).toBe(network);
    for (const other of ['2001:db8:0:1::1', '2001:db9::1', 'fe80::1%eth0'])
      expect(callerAddress(other), other).not.toBe(network);
    expect(callerAddress('::ffff:192.0.2.7')).toBe('192.0.2.7');
    expect(callerAddress('192.0.2.7')).toBe('192.0.2.7');
  });
});

describe('secrets', () => {
  it('stand neither in the log nor in the audit trail, even when a query fails', async () => {
    const lines: string[] = [];
    const logger = createLogger('test', 'trace', { write: (line) => void lines.push(line) });
    const server = await startServer({ ...api.deps, logger });
    const secrets: string[] = [testPassword, 'a changed password', 'a wrong password'];
    const call = <E extends Parameters<typeof callApi>[1]>(e: E, o: Parameters<typeof callApi<E>>[2]) =>
      callApi(server.url, e, { ...o, headers: from(1) });
    try {
      const { email } = await api.addPerson(stationId, 'manager');
      await call(contract.signIn, { body: { email, password: 'a wrong password' } });
      const entry = await call(contract.signIn, { body: { email, password: testPassword } });
      const cookie = entry.headers.get('set-cookie')!.split(';')[0]!;
      const { accessToken } = contract.signedIn.parse(entry.body);
      secrets.push(accessToken, cookie.split('=')[1]!);
      const next = await call(contract.refresh, { cookie });
      secrets.push(next.headers.get('set-cookie')!.split(';')[0]!.split('=')[1]!);
      const made = await call(makeToken, {
        params: { stationId },
        body: { name: 'Switch box', scopes: ['dwell:write'] },
        token: accessToken,
      });
      secrets.push(makeToken.reply.parse(made.body).secret);
      for (const ask of [
        () => call(contract.askPasswordReset, { body: { email } }),
        () =>
          call(inviteMember, {
            params: { stationId },
            body: { email: 'somebody@station.example', role: 'operator' },
            token: accessToken,
          }),
      ]) {
        const arriving = api.mailbox.next();
        await ask();
        secrets.push(/#(\S+)/.exec((await arriving).text)![1]!);
      }
      const invitation = secrets.at(-1)!;
      // A defect in the database's shape makes the insert of an account fail with the whole row in its message.
      await api.dataSource.query(`ALTER TABLE app_user ADD CONSTRAINT no_ulla CHECK (name <> 'Ulla')`);
      const broken = await call(contract.acceptInvitation, {
        body: { token: invitation, name: 'Ulla', password: 'a changed password' },
      });
      expect(broken.status).toBe(500);
      expect(broken.body).toMatchObject({ code: 'internal' });
      expect(broken.text).not.toContain('no_ulla');
      await api.dataSource.query('ALTER TABLE app_user DROP CONSTRAINT no_ulla');
      await call(contract.changePassword, {
        body: { current: testPassword, next: 'a changed password' },
        token: accessToken,
      });
    } finally {
      await server.stop();
    }
    const log = lines.join('');
    expect(log).toContain('no_ulla');
    expect(log).toContain('/api/auth/sign-in');
    const trail = JSON.stringify(await api.dataSource.query('SELECT * FROM audit_entry'));
    expect(trail).toContain('token.make');
    expect(secrets).toHaveLength(9);
    for (const secret of secrets) {
      expect(log).not.toContain(secret);
      expect(trail).not.toContain(secret);
    }
    expect(log).not.toContain('$argon2id$');
    const stored: { hashes: string }[] = await api.dataSource.query(
      `SELECT coalesce(string_agg(t::text, ' '), '') AS hashes FROM (
         SELECT token_hash::text AS t FROM refresh_token UNION ALL SELECT token_hash::text FROM api_token
         UNION ALL SELECT token_hash::text FROM password_reset UNION ALL SELECT token_hash::text FROM invitation
         UNION ALL SELECT password_hash FROM app_user) AS kept`,
    );
    for (const secret of secrets) expect(stored[0]!.hashes).not.toContain(secret);
  });

  it('of an account show in the audit trail as what was done, by whom, to what', async () => {
    const elsewhere = await insertStation(api.dataSource);
    const manager = await api.addPerson(elsewhere.stationId, 'manager');
    const params = { stationId: elsewhere.stationId };
    const arriving = api.mailbox.next();
    await api.call(inviteMember, {
      params,
      body: { email: 'joiner@station.example', role: 'analyst' },
      token: manager.token,
    });
    const token = /#(\S+)/.exec((await arriving).text)![1]!;
    await api.call(contract.acceptInvitation, {
      body: { token, name: 'Joiner', password: 'a password of mine' },
      headers: from(1),
    });
    const first = listAudit.reply.parse(
      (await api.call(listAudit, { params, query: { limit: 1 }, token: manager.token })).body,
    );
    expect(first.items.map(({ who, action, detail }) => ({ who, action, detail }))).toEqual([
      { who: 'Joiner', action: 'member.join', detail: { role: 'analyst' } },
    ]);
    const rest = listAudit.reply.parse(
      (await api.call(listAudit, { params, query: { after: first.next!, limit: 5 }, token: manager.token }))
        .body,
    );
    expect(rest.items.map((e) => e.action)).toEqual(['member.invite']);
    expect(rest.next).toBeNull();
    expect(rest.items[0]!.who).toMatch(/^manager/);
  });
});
