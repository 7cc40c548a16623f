import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import * as contract from '../../shared/contracts/auth.ts';
import { inviteMember, listMembers, withdrawInvitation } from '../../shared/contracts/member.ts';
import type { Role } from '../../shared/contracts/permission.ts';
import { startServer, startTestApi, callApi, testPassword } from '../helpers/api.ts';
import type { TestApi, TestReply } from '../helpers/api.ts';
import { insertStation } from '../helpers/station-rows.ts';

let api: TestApi;
let stationId: number;
let managerToken: string;
let tests = 0;

beforeAll(async () => {
  api = await startTestApi();
  stationId = (await insertStation(api.dataSource)).stationId;
  managerToken = (await api.addPerson(stationId, 'manager')).token;
});
afterAll(() => api.close());
beforeEach(() => {
  tests += 1;
});

const headers = () => ({ 'x-forwarded-for': `10.8.0.${tests}` });
const codeOf = (reply: TestReply) => (reply.body as { code: string }).code;
const errorsOf = (reply: TestReply) => (reply.body as { errors?: unknown }).errors;
const tokenIn = (text: string, page: string) => new RegExp(`/${page}#(\\S+)`).exec(text)![1]!;
const signIn = (email: string, password: string) =>
  api.call(contract.signIn, { body: { email, password }, headers: headers() });

describe('a forgotten password', () => {
  const ask = (email: string) => api.call(contract.askPasswordReset, { body: { email }, headers: headers() });
  const confirm = (token: string, password = 'a new password for tests') =>
    api.call(contract.resetPassword, { body: { token, password }, headers: headers() });
  const resetToken = async (email: string) => {
    const arriving = api.mailbox.next();
    await ask(email);
    return tokenIn((await arriving).text, 'password-reset');
  };

  it('is answered alike for known, unknown and disabled addresses; only the known one gets a message', async () => {
    const known = await api.addPerson(stationId, 'operator');
    const disabled = await api.addPerson(stationId, 'operator');
    await api.dataSource.query('UPDATE app_user SET disabled_at = now() WHERE id = $1', [disabled.userId]);
    const before = api.mailbox.messages().length;
    const replies = [await ask('nobody@station.example'), await ask(disabled.email)];
    const arriving = api.mailbox.next();
    replies.push(await ask(known.email));
    for (const reply of replies) expect([reply.status, reply.text]).toEqual([204, '']);
    expect((await arriving).to).toBe(known.email);
    await api.deps.mailer.drain();
    expect(api.mailbox.messages()).toHaveLength(before + 1);
  });

  it('is replaced through the link, which works once and ends all sessions', async () => {
    const person = await api.addPerson(stationId, 'operator');
    const token = await resetToken(person.email);
    expect((await api.call(contract.readProfile, { token: person.token })).status).toBe(200);
    expect((await confirm(token)).status).toBe(204);
    expect((await api.call(contract.readProfile, { token: person.token })).status).toBe(401);
    expect((await signIn(person.email, testPassword)).status).toBe(401);
    expect((await signIn(person.email, 'a new password for tests')).status).toBe(200);
    const again = await confirm(token, 'yet another password');
    expect([again.status, codeOf(again)]).toEqual([400, 'link-spent']);
    expect((await signIn(person.email, 'a new password for tests')).status).toBe(200);
  });

  it('is replaced once by two simultaneous uses of one link', async () => {
    const person = await api.addPerson(stationId, 'operator');
    const token = await resetToken(person.email);
    const replies = await Promise.all([
      confirm(token, 'the first password'),
      confirm(token, 'the second password'),
    ]);
    expect(replies.map((r) => r.status).sort()).toEqual([204, 400]);
  });

  it('makes older links worthless once it is replaced', async () => {
    const person = await api.addPerson(stationId, 'operator');
    const older = await resetToken(person.email);
    const newer = await resetToken(person.email);
    expect((await confirm(newer)).status).toBe(204);
    expect((await confirm(older, 'somebody else wants in')).status).toBe(400);
  });

  it('keeps a password that is too short out without spending the link, and refuses expired and made-up links', async () => {
    const person = await api.addPerson(stationId, 'operator');
    const token = await resetToken(person.email);
    const short = await confirm(token, 'short');
    expect([short.status, errorsOf(short)]).toEqual([
      400,
      [{ path: 'body.password', message: 'Use at least 12 characters.' }],
    ]);
    await api.dataSource.query(`UPDATE password_reset SET expires_at = now() - interval '1 second'`);
    expect(codeOf(await confirm(token))).toBe('link-spent');
    expect(codeOf(await confirm('x'.repeat(43)))).toBe('link-spent');
    expect((await signIn(person.email, testPassword)).status).toBe(200);
  });
});

describe('an invitation', () => {
  const invite = async (email: string, role: Role = 'analyst') => {
    const arriving = api.mailbox.next();
    const reply = await api.call(inviteMember, {
      params: { stationId },
      body: { email, role },
      token: managerToken,
    });
    expect(reply.status).toBe(201);
    const { id } = inviteMember.reply.parse(reply.body);
    return { id, token: tokenIn((await arriving).text, 'invitation') };
  };
  const read = (token: string) => api.call(contract.readInvitation, { body: { token }, headers: headers() });
  const accept = (body: { token: string; name?: string; password: string }) =>
    api.call(contract.acceptInvitation, { body, headers: headers() });
  const emailsOf = async () => {
    const reply = await api.call(listMembers, { params: { stationId }, token: managerToken });
    const { members, invitations } = listMembers.reply.parse(reply.body);
    return { members: members.map((m) => `${m.email} ${m.role}`), open: invitations.map((i) => i.email) };
  };

  it('makes a new person with a name and a password, and is used up by it', async () => {
    const { token } = await invite('New.Person@Station.example');
    const offered = contract.readInvitation.reply.parse((await read(token)).body);
    expect(offered).toMatchObject({
      stationName: 'Corrib Low Band Group',
      email: 'new.person@station.example',
      role: 'analyst',
      hasAccount: false,
    });
    expect(errorsOf(await accept({ token, name: 'Nuala', password: 'short' }))).toEqual([
      { path: 'body.password', message: 'Use at least 12 characters.' },
    ]);
    expect(errorsOf(await accept({ token, password: 'a password of mine' }))).toEqual([
      { path: 'body.name', message: 'Give your name.' },
    ]);
    const entry = await accept({ token, name: 'Nuala', password: 'a password of mine' });
    expect(entry.status).toBe(200);
    expect(contract.signedIn.parse(entry.body).profile).toMatchObject({
      name: 'Nuala',
      memberships: [{ stationId, role: 'analyst' }],
    });
    expect(entry.headers.get('set-cookie')).toContain('HttpOnly');
    expect(codeOf(await accept({ token, name: 'Nuala', password: 'a password of mine' }))).toBe('link-spent');
    expect(codeOf(await read(token))).toBe('link-spent');
    expect((await signIn('new.person@station.example', 'a password of mine')).status).toBe(200);
  });

  it('takes a known person by the right password only, and leaves the account as it was', async () => {
    const elsewhere = await insertStation(api.dataSource);
    const known = await api.addPerson(elsewhere.stationId, 'contester');
    const { token } = await invite(known.email, 'operator');
    expect(contract.readInvitation.reply.parse((await read(token)).body).hasAccount).toBe(true);
    const wrong = await accept({ token, name: 'Impostor', password: 'a guess at the password' });
    expect([wrong.status, codeOf(wrong)]).toEqual([401, 'wrong-credentials']);
    const entry = await accept({ token, name: 'Impostor', password: testPassword });
    expect(entry.status).toBe(200);
    const { profile } = contract.signedIn.parse(entry.body);
    expect(profile.name).not.toBe('Impostor');
    expect(profile.memberships.map((m) => [m.stationId, m.role])).toContainEqual([stationId, 'operator']);
    expect(profile.memberships).toHaveLength(2);
  });

  it('makes one member of two simultaneous uses', async () => {
    const { token } = await invite('twice@station.example');
    const body = { token, name: 'Twice', password: 'a password of mine' };
    const replies = await Promise.all([accept(body), accept(body)]);
    expect(replies.map((r) => r.status).sort()).toEqual([200, 400]);
    expect((await emailsOf()).members.filter((m) => m.startsWith('twice@'))).toHaveLength(1);
  });

  it('tells the later of two stations in a sentence when a new person accepts both at once', async () => {
    const elsewhere = await insertStation(api.dataSource);
    const otherManager = await api.addPerson(elsewhere.stationId, 'manager');
    const here = await invite('both@station.example');
    const arriving = api.mailbox.next();
    await api.call(inviteMember, {
      params: { stationId: elsewhere.stationId },
      body: { email: 'both@station.example', role: 'operator' },
      token: otherManager.token,
    });
    const there = tokenIn((await arriving).text, 'invitation');
    const replies = await Promise.all(
      [here.token, there].map((token) => accept({ token, name: 'Both', password: 'a password of mine' })),
    );
    const left = replies[0]!.status === 200 ? there : here.token;
    for (const reply of replies) expect([200, 401, 409]).toContain(reply.status);
    const again = await accept({ token: left, password: 'a password of mine' });
    const worked = [...replies, again].filter((r) => r.status === 200);
    expect(worked).toHaveLength(2);
  });

  it('is worthless when withdrawn, replaced or expired', async () => {
    const withdrawn = await invite('gone@station.example');
    const first = await invite('replaced@station.example');
    const second = await invite('replaced@station.example', 'operator');
    const gone = await api.call(withdrawInvitation, {
      params: { stationId, invitationId: withdrawn.id },
      token: managerToken,
    });
    expect(gone.status).toBe(204);
    const body = { name: 'Late', password: 'a password of mine' };
    expect(codeOf(await accept({ ...body, token: withdrawn.token }))).toBe('link-spent');
    expect(codeOf(await accept({ ...body, token: first.token }))).toBe('link-spent');
    expect((await emailsOf()).open.filter((e) => e === 'replaced@station.example')).toHaveLength(1);
    await api.dataSource.query(
      `UPDATE invitation SET expires_at = now() - interval '1 second' WHERE id = $1`,
      [second.id],
    );
    expect(codeOf(await accept({ ...body, token: second.token }))).toBe('link-spent');
    expect((await emailsOf()).members.filter((m) => /^(gone|replaced)@/.test(m))).toEqual([]);
  });

  it('cannot be sent to a member, and not withdrawn twice', async () => {
    const member = await api.addPerson(stationId, 'contester');
    const reply = await api.call(inviteMember, {
      params: { stationId },
      body: { email: member.email, role: 'analyst' },
      token: managerToken,
    });
    expect([reply.status, (reply.body as { detail: string }).detail]).toEqual([
      409,
      'This person is a member already.',
    ]);
    const { id } = await invite('once@station.example');
    const withdraw = { params: { stationId, invitationId: id }, token: managerToken };
    expect((await api.call(withdrawInvitation, withdraw)).status).toBe(204);
    expect((await api.call(withdrawInvitation, withdraw)).status).toBe(404);
  });
});

describe('the set-up link', () => {
  const setUpToken = 'the set-up token of the first start';
  const body = (token: string, station = {}) => ({
    token,
    email: 'First@Station.example',
    name: 'First',
    password: 'a password of mine',
    station: { name: 'New station', callSign: 'ei8qrz', locator: 'io53kr', ...station },
  });

  it('makes the first station and its manager once, then never again', async () => {
    const fresh = await startTestApi({ setUpToken });
    try {
      const setUp = (b: ReturnType<typeof body>) => fresh.call(contract.setUp, { body: b });
      expect((await setUp(body('another token, long enough'))).status).toBe(404);
      expect(errorsOf(await setUp(body(setUpToken, { callSign: 'no call!' })))).toEqual([
        {
          path: 'body.station.callSign',
          message: 'Give a call sign of letters and digits such as EI7QSB.',
        },
      ]);
      expect(errorsOf(await setUp(body(setUpToken, { locator: 'ZZ99' })))).toMatchObject([
        { path: 'body.station.locator' },
      ]);
      const replies = await Promise.all([setUp(body(setUpToken)), setUp(body(setUpToken))]);
      expect(replies.map((r) => r.status).sort()).toEqual([200, 409]);
      const entry = replies.find((r) => r.status === 200)!;
      expect(contract.signedIn.parse(entry.body).profile).toMatchObject({
        email: 'first@station.example',
        memberships: [{ stationName: 'New station', callSign: 'EI8QRZ', role: 'manager' }],
      });
      expect((await setUp(body(setUpToken))).status).toBe(409);
      expect(await fresh.dataSource.query('SELECT locator, time_zone, itu_region FROM station')).toEqual([
        { locator: 'IO53kr', time_zone: 'Europe/Dublin', itu_region: 1 },
      ]);
    } finally {
      await fresh.close();
    }
  });

  it('does not exist where no token was given at the start', async () => {
    expect(api.deps.config.setUpToken).toBe('');
    expect((await api.call(contract.setUp, { body: body('x'.repeat(20)), headers: headers() })).status).toBe(
      404,
    );
  });

  it('shows demo accounts and demo mail in demo mode only', async () => {
    const accounts = await api.call(contract.demoAccounts);
    expect(accounts.body).toEqual({ accounts: [] });
    const real = await startServer({ ...api.deps, demoMailbox: null });
    try {
      expect((await callApi(real.url, contract.demoMail)).body).toEqual({ messages: [] });
    } finally {
      await real.stop();
    }
  });
});
