import { createPinia, setActivePinia } from 'pinia';
import { createApp } from 'vue';
import { createMemoryHistory } from 'vue-router';
import type { Router } from 'vue-router';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { dropAccess } from '../api/access.ts';
import { profileFixture, signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer } from '../../tests/helpers/client-server.ts';
import { useSessionStore } from '../stores/session.ts';
import { homeOf, safeReturnPath } from './home.ts';
import { createAppRouter } from './index.ts';
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

describe('the guards of the router', () => {
  it('send a stranger to sign-in, remembering where they wanted to go', async () => {
    await router.push('/s/1/settings?tab=2');
    expect(router.currentRoute.value).toMatchObject({
      name: 'sign-in',
      query: { next: '/s/1/settings?tab=2' },
    });
    expect(document.title).toBe('Sign in - Whichwire');
  });

  it('let a stranger read an invitation without asking who they are', async () => {
    await router.push('/invitation#a-token');
    expect(router.currentRoute.value.name).toBe('invitation');
    expect(server.seen).toEqual([]);
  });

  it('let a member in', async () => {
    await signIn();
    await router.push('/s/2/settings');
    expect(router.currentRoute.value).toMatchObject({ name: 'settings', params: { stationId: '2' } });
  });

  it('show a foreign station and one that never was as the same nothing, under the same address', async () => {
    await signIn();
    for (const path of ['/s/77/settings', '/s/0/settings', '/nowhere/at/all']) {
      await router.push(path);
      expect(router.currentRoute.value).toMatchObject({ name: 'not-found', path });
    }
  });

  it('send whoever is signed in from the door to the start page', async () => {
    await signIn();
    await router.push('/sign-in');
    expect(router.currentRoute.value.params.stationId).toBe('1');
    await router.push('/?station=2');
    expect(router.currentRoute.value.params.stationId).toBe('2');
  });
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
