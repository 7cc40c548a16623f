import { flushPromises, mount } from '@vue/test-utils';
import type { VueWrapper } from '@vue/test-utils';
import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { createMemoryHistory, createRouter } from 'vue-router';
import { profileFixture, signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer } from '../../tests/helpers/client-server.ts';
import { dropAccess, takeAccess } from '../api/access.ts';
import { useMembersStore } from '../stores/members.ts';
import { useSessionStore } from '../stores/session.ts';
import { useStationStore } from '../stores/station.ts';
import MembersView from './MembersView.vue';

const since = '2026-11-30T18:00:00Z';
const ann = { userId: profileFixture.id, name: 'Ann', email: 'ann@example.org', role: 'manager', since };
const ben = {
  userId: '6f0c1f0e-7a55-4c1e-9b5e-2f0f6f3f2a12',
  name: 'Ben',
  email: 'ben@example.org',
  role: 'operator',
  since,
};
const token = {
  id: '6f0c1f0e-7a55-4c1e-9b5e-2f0f6f3f2a13',
  name: 'Switch box',
  scopes: ['dwell:write'],
  createdAt: since,
  expiresAt: '2099-01-01T00:00:00Z',
  lastUsedAt: null,
  revokedAt: null,
};
const secret = `wwk_${'s'.repeat(43)}`;
const entry = (id: number) => ({
  id,
  at: since,
  who: 'Ann',
  action: 'member.change-role',
  target: ben.userId,
  detail: { from: 'operator', to: `step ${id}` },
});

let server: LocalServer;
let sent: unknown[];
let page: VueWrapper | null = null;

beforeEach(async () => {
  sent = [];
  const keep = (answer: unknown) => (body: unknown) => {
    sent.push(body);
    return { body: answer };
  };
  server = await startLocalServer({
    'GET /stations/1/members': () => ({ body: { members: [ann, ben], invitations: [] } }),
    'GET /stations/1/tokens': () => ({ body: { items: [token] } }),
    'GET /stations/1/audit?limit=50': () => ({ body: { items: [entry(3), entry(2)], next: '2' } }),
    'GET /stations/1/audit?limit=50&after=2': () => ({ body: { items: [entry(1)], next: null } }),
    'POST /stations/1/tokens': keep({ token, secret }),
    [`PATCH /stations/1/members/${ben.userId}`]: keep(ben),
    [`DELETE /stations/1/members/${ben.userId}`]: () => ({
      status: 409,
      detail: 'This is the last manager of the station.',
    }),
  });
  localStorage.clear();
  sessionStorage.clear();
  setActivePinia(createPinia());
  useSessionStore();
  const memberships = [{ ...profileFixture.memberships[0]!, role: 'manager' as const }];
  takeAccess({ ...signedInFixture(), profile: { ...profileFixture, memberships } });
  useStationStore().stationId = 1;
});
afterEach(async () => {
  page?.unmount();
  page = null;
  dropAccess();
  await server.stop();
  document.body.innerHTML = '';
});

async function open(part: string): Promise<VueWrapper> {
  const router = createRouter({
    history: createMemoryHistory(),
    routes: [
      { path: '/demo-mail', name: 'demo-mail', component: { template: '<div />' } },
      { path: '/:rest(.*)*', component: { template: '<div />' } },
    ],
  });
  await router.push(`/s/1/members?part=${part}`);
  page = mount(MembersView, { attachTo: document.body, global: { plugins: [router] } });
  await until(() => page!.find('table').exists());
  return page;
}
async function until(done: () => boolean): Promise<void> {
  await expect.poll(done, { interval: 5 }).toBe(true);
  await flushPromises();
}
const press = async (view: VueWrapper, words: string) => {
  const found = view
    .findAll('button')
    .find((each) => (each.attributes('aria-label') ?? each.text()) === words);
  if (!found) throw new Error(`There is no button "${words}".`);
  await (found.attributes('type') === 'submit'
    ? view.get('dialog form').trigger('submit')
    : found.trigger('click'));
  await flushPromises();
};

describe('the Members page', () => {
  it('offers no change of the last manager, and says why', async () => {
    const view = await open('people');
    const [first, second] = view.findAll('tbody tr');
    expect(first!.text()).toContain('The last manager stays');
    expect(first!.findAll('button')).toHaveLength(0);
    expect(second!.findAll('button').map((each) => each.text())).toEqual(['Change role', 'Remove']);
  });

  it('shows what a person gains and loses before the role is changed', async () => {
    const view = await open('people');
    await press(view, 'Change role of Ben');
    const confirm = () => view.get('dialog button[type=submit]');
    expect(confirm().attributes('disabled')).toBe('');
    await view.get('dialog input[value=contester]').setValue();
    expect(view.get('dialog').text()).toMatch(/Ben may no longer.*log switching and mend the switch log/s);
    expect(confirm().attributes('disabled')).toBeUndefined();
    await press(view, 'Change the role');
    await until(() => !view.find('dialog').exists());
    expect(sent).toEqual([{ role: 'contester' }]);
  });

  it('keeps the question open when the server refuses, with its sentence', async () => {
    const view = await open('people');
    await press(view, 'Remove Ben');
    expect(view.get('dialog').text()).toContain('read comparisons');
    await press(view, 'Remove');
    await until(() => view.find('dialog [role=alert]').exists());
    expect(view.get('dialog [role=alert]').text()).toContain('This is the last manager of the station.');
  });

  it('shows the secret of a new token once, and keeps it nowhere', async () => {
    const view = await open('tokens');
    await press(view, 'Make a token');
    await press(view, 'Make the token');
    expect(view.get('dialog').text()).toContain('Choose at least one scope.');
    await view.get('dialog input.input').setValue('Script');
    await view.get('dialog input[value="spot:read"]').setValue(true);
    await press(view, 'Make the token');
    await until(() => view.find('input[readonly]').exists());
    expect((view.get('input[readonly]').element as HTMLInputElement).value).toBe(secret);
    expect(sent).toEqual([{ name: 'Script', scopes: ['spot:read'], days: 365 }]);
    const stored = JSON.stringify([{ ...localStorage }, { ...sessionStorage }, useMembersStore().$state]);
    expect(stored).not.toContain(secret);
    await press(view, 'I have copied it');
    expect(view.html()).not.toContain(secret);
  });

  it('reads the audit trail page by page, with names and words', async () => {
    const view = await open('audit');
    await until(() => view.text().includes('to step 2'));
    await until(() => view.text().includes('Ben'));
    expect(view.findAll('tbody tr')[0]!.text()).toContain("changed a member's role");
    await press(view, 'Show more');
    await until(() => view.findAll('tbody tr').length === 3);
    expect(view.findAll('button').map((each) => each.text())).not.toContain('Show more');
  });

  it('drops an answer for a station that is no longer open', async () => {
    const store = useMembersStore();
    store.open(1);
    const loading = store.loadPeople();
    store.open(2);
    await loading;
    expect(store.members).toEqual([]);
    expect(store.peopleState).toBe('idle');
  });
});
