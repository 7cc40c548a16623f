import jwt from 'jsonwebtoken';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import * as contract from '../../shared/contracts/auth.ts';
import { listAntennas } from '../../shared/contracts/antenna.ts';
import { listMembers } from '../../shared/contracts/member.ts';
import { signAccessToken } from '../../server/middleware/authenticate.ts';
import { startTestApi, testPassword } from '../helpers/api.ts';
import type { TestApi, TestReply } from '../helpers/api.ts';
import { insertStation } from '../helpers/station-rows.ts';

let api: TestApi;
let stationId: number;
let people = 0;
let person: { email: string; userId: string; token: string };

beforeAll(async () => {
  api = await startTestApi();
  stationId = (await insertStation(api.dataSource)).stationId;
});
afterAll(() => api.close());
beforeEach(async () => {
  people += 1;
  person = await api.addPerson(stationId, 'manager');
});

/** Every test calls from an address of its own, so that the rate limits do not join them. */
const caller = () => ({ 'x-forwarded-for': `10.9.0.${people}` });
const signIn = (email: string, password: string, headers: Record<string, string> = {}) =>
  api.call(contract.signIn, { body: { email, password }, headers: { ...caller(), ...headers } });
const setCookie = (reply: TestReply) => reply.headers.get('set-cookie') ?? '';
const cookieOf = (reply: TestReply) => setCookie(reply).split(';')[0]!;
const accessOf = (reply: TestReply) => (reply.body as { accessToken: string }).accessToken;
const codeOf = (reply: TestReply) => (reply.body as { code: string }).code;
const refresh = (cookie: string) => api.call(contract.refresh, { cookie, headers: caller() });
const whoAmI = (token: string) => api.call(contract.readProfile, { token });
/** As if the token had been used longer ago than two tabs can be apart. */
const usedLongAgo = () =>
  api.dataSource.query(
    `UPDATE refresh_token SET used_at = used_at - interval '1 minute' WHERE used_at IS NOT NULL`,
  );

describe('signing in', () => {
  it('gives a profile, an access token of ten minutes and a cookie that scripts and other sites cannot use', async () => {
    const reply = await signIn(` ${person.email.toUpperCase()} `, testPassword);
    expect(reply.status).toBe(200);
    expect(reply.headers.get('cache-control')).toBe('no-store');
    const { profile, expiresAt } = contract.signedIn.parse(reply.body);
    expect(profile.email).toBe(person.email);
    expect(profile.memberships).toEqual([
      { stationId, stationName: 'Corrib Low Band Group', callSign: 'EI7QSB', role: 'manager' },
    ]);
    const seconds = (Date.parse(expiresAt) - Date.now()) / 1000;
    expect(seconds).toBeGreaterThan(540);
    expect(seconds).toBeLessThanOrEqual(600);
    const attributes = setCookie(reply).split('; ').slice(1);
    expect(attributes.sort()).toEqual(['HttpOnly', 'Max-Age=2592000', 'Path=/api/auth', 'SameSite=Strict']);
    expect(reply.text).not.toContain(cookieOf(reply).split('=')[1]);
    expect((await whoAmI(accessOf(reply))).status).toBe(200);
  });

  it('answers a wrong password, an unknown address and a disabled account with the same words', async () => {
    const disabled = await api.addPerson(stationId, 'operator');
    await api.dataSource.query('UPDATE app_user SET disabled_at = now() WHERE id = $1', [disabled.userId]);
    const replies = [
      await signIn(person.email, 'not the password'),
      await signIn('nobody@station.example', testPassword),
      await signIn(disabled.email, testPassword),
    ];
    for (const reply of replies) {
      expect(reply.status).toBe(401);
      expect(setCookie(reply)).toBe('');
      expect({ ...(reply.body as object), requestId: '' }).toEqual({
        type: 'about:blank',
        title: 'Not signed in',
        status: 401,
        code: 'wrong-credentials',
        detail: 'E-mail address or password is not right.',
        requestId: '',
      });
    }
  });

  it('ends at once for an account that is disabled later', async () => {
    const entry = await signIn(person.email, testPassword);
    await api.dataSource.query('UPDATE app_user SET disabled_at = now() WHERE id = $1', [person.userId]);
    expect((await whoAmI(accessOf(entry))).status).toBe(401);
    expect((await api.call(listMembers, { params: { stationId }, token: accessOf(entry) })).status).toBe(401);
    expect((await refresh(cookieOf(entry))).status).toBe(401);
  });

  it('names the field of an address that is none', async () => {
    const reply = await signIn('nobody', testPassword);
    expect(reply.status).toBe(400);
    expect((reply.body as { errors: unknown }).errors).toEqual([
      { path: 'body.email', message: 'Give an e-mail address such as name@example.org.' },
    ]);
  });
});

describe('access tokens', () => {
  const claims = (token: string) => jwt.decode(token) as { sub: string; sid: string };

  it('are refused when they have expired', async () => {
    const { sub, sid } = claims(person.token);
    const sign = (seconds: number) =>
      jwt.sign({ sid }, api.deps.config.jwtSecret, { subject: sub, issuer: 'whichwire', expiresIn: seconds });
    expect((await whoAmI(sign(60))).status).toBe(200);
    const late = await whoAmI(sign(-1));
    expect([late.status, codeOf(late)]).toEqual([401, 'token-expired']);
  });

  it('are refused when they were made by somebody else', async () => {
    const { sub, sid } = claims(person.token);
    const secret = api.deps.config.jwtSecret;
    const [head, body, signature] = person.token.split('.') as [string, string, string];
    const base64 = (value: object) => Buffer.from(JSON.stringify(value)).toString('base64url');
    const other = await api.addPerson(stationId, 'contester');
    const forged = {
      'algorithm none': jwt.sign({ sid }, '', { algorithm: 'none', subject: sub, issuer: 'whichwire' }),
      'none with a signature': `${base64({ alg: 'none', typ: 'JWT' })}.${body}.${signature}`,
      'another algorithm': jwt.sign({ sid }, secret, {
        algorithm: 'HS512',
        subject: sub,
        issuer: 'whichwire',
      }),
      'another secret': signAccessToken('another secret, thirty-two characters', sub, sid),
      'another issuer': jwt.sign({ sid }, secret, { subject: sub, issuer: 'somebody' }),
      'no issuer': jwt.sign({ sid }, secret, { subject: sub }),
      'no session': jwt.sign({}, secret, { subject: sub, issuer: 'whichwire' }),
      'changed body': `${head}.${base64({ ...claims(person.token), sub: other.userId })}.${signature}`,
      'no signature': `${head}.${body}.`,
      "another person's session": signAccessToken(secret, other.userId, sid),
    };
    for (const [kind, token] of Object.entries(forged)) {
      expect((await whoAmI(token)).status, kind).toBe(401);
      expect((await api.call(listAntennas, { params: { stationId }, token })).status, kind).toBe(401);
    }
  });
});

describe('refreshing', () => {
  it('exchanges the cookie for another one and an access token of the same session', async () => {
    const entry = await signIn(person.email, testPassword);
    const next = await refresh(cookieOf(entry));
    expect(next.status).toBe(200);
    expect(cookieOf(next)).not.toBe(cookieOf(entry));
    expect(setCookie(next)).toContain('HttpOnly');
    expect(setCookie(next)).toContain('SameSite=Strict');
    const sessionOf = (reply: TestReply) => (jwt.decode(accessOf(reply)) as { sid: string }).sid;
    expect(sessionOf(next)).toBe(sessionOf(entry));
    expect((await refresh(cookieOf(next))).status).toBe(200);
  });

  it('ends the whole session when a used token comes back, and writes it down', async () => {
    const entry = await signIn(person.email, testPassword);
    const next = await refresh(cookieOf(entry));
    await usedLongAgo();
    const replay = await refresh(cookieOf(entry));
    expect([replay.status, codeOf(replay)]).toEqual([401, 'session-ended']);
    expect(setCookie(replay)).toMatch(/^whichwire_refresh=;.*Max-Age=0/);
    expect((await refresh(cookieOf(next))).status).toBe(401);
    expect((await whoAmI(accessOf(next))).status).toBe(401);
    // The person's other sessions have nothing to do with it.
    expect((await whoAmI(person.token)).status).toBe(200);
    expect(
      await api.dataSource.query(
        `SELECT action, target, detail FROM audit_entry WHERE user_id = $1 AND action = 'auth.refresh-reuse'`,
        [person.userId],
      ),
    ).toEqual([
      {
        action: 'auth.refresh-reuse',
        target: person.userId,
        detail: { reason: 'refresh token used twice' },
      },
    ]);
  });

  it('lets one of two simultaneous tabs win, and the other go on with what the winner got', async () => {
    const entry = await signIn(person.email, testPassword);
    const replies = await Promise.all([refresh(cookieOf(entry)), refresh(cookieOf(entry))]);
    const [winner, loser] = replies.sort((a, b) => a.status - b.status) as [TestReply, TestReply];
    expect([winner.status, loser.status, codeOf(loser)]).toEqual([200, 409, 'refresh-raced']);
    expect(setCookie(loser)).toBe('');
    expect((await refresh(cookieOf(winner))).status).toBe(200);
  });

  it('still catches a thief who was as quick as a second tab', async () => {
    const entry = await signIn(person.email, testPassword);
    const thief = await refresh(cookieOf(entry));
    expect((await refresh(cookieOf(entry))).status).toBe(409);
    await usedLongAgo();
    expect((await refresh(cookieOf(entry))).status).toBe(401);
    expect((await refresh(cookieOf(thief))).status).toBe(401);
  });

  it('refuses no cookie, an unknown one and one of a session that is over', async () => {
    expect((await api.call(contract.refresh, { headers: caller() })).status).toBe(401);
    expect((await refresh(`whichwire_refresh=${'x'.repeat(43)}`)).status).toBe(401);
    const entry = await signIn(person.email, testPassword);
    await api.dataSource.query(
      `UPDATE session SET expires_at = now() - interval '1 second' WHERE user_id = $1`,
      [person.userId],
    );
    expect((await refresh(cookieOf(entry))).status).toBe(401);
    expect((await whoAmI(accessOf(entry))).status).toBe(401);
  });

  it('gives the profile as it is now, with the role of today', async () => {
    const entry = await signIn(person.email, testPassword);
    await api.dataSource.query(`UPDATE membership SET role = 'analyst' WHERE user_id = $1`, [person.userId]);
    const next = contract.signedIn.parse((await refresh(cookieOf(entry))).body);
    expect(next.profile.memberships.map((m) => m.role)).toEqual(['analyst']);
  });
});

describe('ending sessions', () => {
  const sessions = async (token: string) =>
    contract.listSessions.reply.parse((await api.call(contract.listSessions, { token })).body).items;

  it('signs out, even with a cookie that another tab has used up', async () => {
    const entry = await signIn(person.email, testPassword);
    const next = await refresh(cookieOf(entry));
    const out = await api.call(contract.signOut, { cookie: cookieOf(entry), headers: caller() });
    expect(out.status).toBe(204);
    expect(setCookie(out)).toMatch(/^whichwire_refresh=;.*Max-Age=0/);
    expect((await refresh(cookieOf(next))).status).toBe(401);
    expect((await whoAmI(accessOf(next))).status).toBe(401);
    expect((await api.call(contract.signOut, { headers: caller() })).status).toBe(204);
  });

  it('lists the browsers that are signed in, and ends one of them', async () => {
    const phone = await signIn(person.email, testPassword, { 'user-agent': 'a phone' });
    const before = await sessions(accessOf(phone));
    expect(before.filter((s) => s.isThis).map((s) => s.userAgent)).toEqual(['a phone']);
    expect(before).toHaveLength(2);
    const other = before.find((s) => !s.isThis)!;
    const end = { params: { sessionId: other.id }, token: accessOf(phone) };
    expect((await api.call(contract.endSession, end)).status).toBe(204);
    expect((await whoAmI(person.token)).status).toBe(401);
    expect((await sessions(accessOf(phone))).map((s) => s.userAgent)).toEqual(['a phone']);
    expect((await api.call(contract.endSession, end)).status).toBe(404);
  });

  it("does not end another person's session", async () => {
    const other = await api.addPerson(stationId, 'operator');
    const [theirs] = await sessions(other.token);
    const reply = await api.call(contract.endSession, {
      params: { sessionId: theirs!.id },
      token: person.token,
    });
    expect(reply.status).toBe(404);
    expect((await whoAmI(other.token)).status).toBe(200);
  });

  it('ends all other sessions when the password changes', async () => {
    const entry = await signIn(person.email, testPassword);
    const change = (current: string, token: string) =>
      api.call(contract.changePassword, {
        body: { current, next: 'another password for tests' },
        token,
        headers: caller(),
      });
    const wrong = await change('not the password', accessOf(entry));
    expect([wrong.status, (wrong.body as { errors: unknown }).errors]).toEqual([
      400,
      [{ path: 'body.current', message: 'This is not your present password.' }],
    ]);
    const changed = await change(testPassword, accessOf(entry));
    expect(changed.status).toBe(200);
    expect((await whoAmI(person.token)).status).toBe(401);
    expect((await whoAmI(accessOf(entry))).status).toBe(401);
    expect((await refresh(cookieOf(entry))).status).toBe(401);
    expect((await whoAmI(accessOf(changed))).status).toBe(200);
    expect((await refresh(cookieOf(changed))).status).toBe(200);
    expect((await signIn(person.email, testPassword)).status).toBe(401);
    expect((await signIn(person.email, 'another password for tests')).status).toBe(200);
  });
});
