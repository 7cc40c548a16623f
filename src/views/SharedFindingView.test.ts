import { mount } from '@vue/test-utils';
import type { VueWrapper } from '@vue/test-utils';
import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { createMemoryHistory, createRouter } from 'vue-router';
import { startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer } from '../../tests/helpers/client-server.ts';
import SharedFindingView from './SharedFindingView.vue';

const token = 't'.repeat(43);
const refused = 'This link has expired, was withdrawn or was never given out. Ask for a new one.';

let server: LocalServer;
let page: VueWrapper | null = null;
let tokens: unknown[];

async function visit(path: string): Promise<VueWrapper> {
  const router = createRouter({
    history: createMemoryHistory(),
    routes: [{ path: '/f', component: { template: '<div />' } }],
  });
  await router.push(path);
  page = mount(SharedFindingView, { attachTo: document.body, global: { plugins: [router] } });
  return page;
}

beforeEach(async () => {
  tokens = [];
  server = await startLocalServer({
    'POST /shared-findings/read': (body) => {
      tokens.push((body as { token: string }).token);
      return { status: 404, code: 'link-refused', detail: refused };
    },
  });
  history.replaceState(null, '');
  setActivePinia(createPinia());
});
afterEach(async () => {
  page?.unmount();
  page = null;
  await server.stop();
  document.body.innerHTML = '';
});

describe('the page of a guest', () => {
  it('says in one sentence that a link opens nothing any more, with nothing to try again', async () => {
    const shown = await visit(`/f#${token}`);
    await expect.poll(() => shown.get('h1').text(), { interval: 5 }).toBe('This link opens nothing');
    expect(shown.text()).toContain(refused);
    expect(shown.findAll('button')).toHaveLength(0);
    expect(server.seen).toEqual(['POST /shared-findings/read']);
  });

  it('knows its link again when the page is loaded anew', async () => {
    await visit(`/f#${token}`);
    await expect.poll(() => tokens.length, { interval: 5 }).toBe(1);
    page!.unmount();
    await visit('/f');
    await expect.poll(() => tokens, { interval: 5 }).toEqual([token, token]);
  });

  it('asks nobody without a link, and says what to do', async () => {
    const shown = await visit('/f');
    expect(shown.get('h1').text()).toBe('The link is missing');
    expect(shown.text()).toContain('Open the link that you were given');
    expect(server.seen).toEqual([]);
  });

  it('asks search engines to leave it alone, only as long as it is shown', async () => {
    const robots = () => document.head.querySelector('meta[name=robots]')?.getAttribute('content');
    await visit('/f');
    expect(robots()).toBe('noindex, nofollow, noarchive');
    page!.unmount();
    expect(robots()).toBeUndefined();
    page = null;
  });
});
