import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { accessToken, dropAccess } from '../api/access.ts';
import { profileFixture, signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer } from '../../tests/helpers/client-server.ts';
import { useTheme } from '../composables/useTheme.ts';
import { useSessionStore } from './session.ts';

let server: LocalServer;

beforeEach(async () => {
  server = await startLocalServer({
    'POST /auth/sign-in': () => ({ body: signedInFixture() }),
    'POST /auth/refresh': () => ({ body: signedInFixture() }),
    'POST /auth/sign-out': () => ({ status: 204 }),
  });
  localStorage.clear();
  setActivePinia(createPinia());
});
afterEach(async () => {
  dropAccess();
  await server.stop();
});

describe('the session', () => {
  it('is known to be nobody without a request in a browser that never signed in', async () => {
    const session = useSessionStore();
    await session.restore();
    expect([session.state, session.profile, server.seen]).toEqual(['ready', null, []]);
  });

  it('comes back by the refresh cookie after the page is loaded again', async () => {
    await useSessionStore().signInWith('analyst@example.org', 'secret');
    setActivePinia(createPinia());
    dropAccess();
    const session = useSessionStore();
    await Promise.all([session.restore(), session.restore()]);
    expect(session.profile).toEqual(profileFixture);
    expect(server.seen).toEqual(['POST /auth/sign-in', 'POST /auth/refresh']);
  });

  it('keeps its token out of storage, where any script could read it', async () => {
    await useSessionStore().signInWith('analyst@example.org', 'secret');
    expect(accessToken()).toBe('a-token-of-the-tests');
    expect(JSON.stringify({ ...localStorage, ...sessionStorage })).not.toContain('a-token-of-the-tests');
  });

  it('takes over the theme and the unit of the person', async () => {
    const session = useSessionStore();
    await session.signInWith('analyst@example.org', 'secret');
    expect([useTheme().choice.value, session.lengthUnit]).toEqual(['light', 'm']);
  });

  it('is nobody, without complaint, when the cookie has run out', async () => {
    localStorage.setItem('whichwire.session', 'yes');
    server.routes['POST /auth/refresh'] = () => ({ status: 401 });
    const session = useSessionStore();
    await session.restore();
    expect([session.state, session.profile, session.problem]).toEqual(['ready', null, null]);
  });

  it('says that the server does not answer, and can be asked again', async () => {
    localStorage.setItem('whichwire.session', 'yes');
    server.routes['POST /auth/refresh'] = () => ({ status: 503, detail: 'Starting.' });
    const session = useSessionStore();
    await session.restore();
    expect([session.state, session.problem?.message]).toEqual(['failed', 'Starting.']);
    server.routes['POST /auth/refresh'] = () => ({ body: signedInFixture() });
    await session.restore();
    expect([session.state, session.isSignedIn]).toEqual(['ready', true]);
  });

  it('ends when the person signs out, and forgets that there was one', async () => {
    const session = useSessionStore();
    await session.signInWith('analyst@example.org', 'secret');
    await session.leave();
    expect([session.profile, accessToken(), localStorage.getItem('whichwire.session')]).toEqual([
      null,
      null,
      null,
    ]);
  });

  it('stays when the server could not be told of the signing out', async () => {
    const session = useSessionStore();
    await session.signInWith('analyst@example.org', 'secret');
    server.routes['POST /auth/sign-out'] = () => ({ status: 500, detail: 'Broken.' });
    await expect(session.leave()).rejects.toThrow('Broken.');
    expect(session.isSignedIn).toBe(true);
  });
});
