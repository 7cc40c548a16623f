import { createPinia, setActivePinia } from 'pinia';
import { createApp } from 'vue';
import { createMemoryHistory } from 'vue-router';
import type { RouteLocationRaw, Router } from 'vue-router';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { dropAccess } from '../api/access.ts';
import { profileFixture, signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer } from '../../tests/helpers/client-server.ts';
import { useSessionStore } from '../stores/session.ts';
import { homeOf, safeReturnPath } from './home.ts';
import { admit, createAppRouter } from './index.ts';
import { stationPages } from './routes.ts';

let server: LocalServer;
let router: Router;

beforeEach(async () => {
  server = await startLocalServer({ 'POST /auth/sign-in': () => ({ body: signedInFixture() }) });
  localStorage.clear();
  const pinia = createPinia();
  createApp({}).use(pinia);
  setActivePinia(pinia);
  router = createAppRouter(createMemoryHistory());
});
afterEach(async () => {
  dropAccess();
  await server.stop();
});

const signIn = () => useSessionStore().signInWith('analyst@example.org', 'secret');

/** What the guard says of an address, without loading the view behind it. */
const ask = (path: string) => admit(router.resolve(path));

describe('the guard of the router', () => {
  it('sends a stranger to sign-in, remembering where they wanted to go', async () => {
    expect(await ask('/s/1/settings?tab=2')).toEqual({
      name: 'sign-in',
      query: { next: '/s/1/settings?tab=2' },
    });
    expect(await ask('/')).toEqual({ name: 'sign-in', query: {} });
  });

  it('lets a stranger read an invitation without asking who they are', async () => {
    localStorage.setItem('whichwire.session', 'yes');
    expect(await ask('/invitation#a-token')).toBe(true);
    expect(server.seen).toEqual([]);
  });

  it('lets a member in at each of their stations', async () => {
    await signIn();
    expect([await ask('/s/1/settings'), await ask('/s/2/settings')]).toEqual([true, true]);
  });

  it('shows a foreign station and one that never was as the same nothing, under the same address', async () => {
    await signIn();
    for (const path of ['/s/77/settings', '/s/0/settings']) {
      const target = (await ask(path)) as RouteLocationRaw;
      expect(router.resolve(target)).toMatchObject({ name: 'not-found', path });
    }
    expect(router.resolve('/nowhere/at/all').name).toBe('not-found');
  });

  it('refuses a page that the role does not include', async () => {
    await signIn();
    const page = router.resolve('/s/2/settings');
    const managed = { ...page, meta: { ...page.meta, permission: 'member:manage' as const } };
    expect(await admit(managed)).toMatchObject({ name: 'not-found' });
  });

  it('sends whoever is signed in from the door to the start page of a station of theirs', async () => {
    await signIn();
    expect(await ask('/sign-in')).toEqual({ name: 'home' });
    expect(await ask('/')).toMatchObject({ params: { stationId: 1 } });
    expect(await ask('/?station=2')).toMatchObject({ params: { stationId: 2 } });
    expect(await ask('/?station=77')).toMatchObject({ params: { stationId: 1 } });
  });
});

it('a page gives its name to the document', async () => {
  await router.push('/sign-in');
  expect(document.title).toBe('Sign in - Whichwire');
});

describe('the start page', () => {
  it('exists for every role', () => {
    const membership = profileFixture.memberships[0]!;
    for (const role of ['manager', 'operator', 'analyst', 'contester'] as const) {
      const home = homeOf({ ...profileFixture, memberships: [{ ...membership, role }] });
      expect(stationPages.map((page) => page.name)).toContain((home as { name: string }).name);
    }
  });
  it('is none for a person without a station', () => {
    expect(homeOf({ ...profileFixture, memberships: [] })).toBeNull();
  });
});

it('returns after sign-in only to pages of this site', () => {
  const tried = [
    '/s/1/settings',
    '//evil.example',
    '/\\evil.example',
    'https://evil.example',
    '/sign-in?next=/',
    7,
  ];
  expect(tried.map(safeReturnPath)).toEqual(['/s/1/settings', null, null, null, null, null]);
});
