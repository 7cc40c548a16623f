import { flushPromises, mount } from '@vue/test-utils';
import type { VueWrapper } from '@vue/test-utils';
import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { createMemoryHistory, createRouter } from 'vue-router';
import type { Router } from 'vue-router';
import { printedFinding } from '../../server/features/findings/pdf/printed-finding.fixture.ts';
import { fixtureAnswer } from '../../shared/pictures/answer.fixture.ts';
import { profileFixture, signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer } from '../../tests/helpers/client-server.ts';
import { dropAccess, takeAccess } from '../api/access.ts';
import { useSessionStore } from '../stores/session.ts';
import { useStationStore } from '../stores/station.ts';
import TrialsView from './TrialsView.vue';

const { question } = fixtureAnswer();
const text = {
  notes: '',
  createdBy: 'Ann',
  createdAt: '2026-11-01T12:00:00Z',
  updatedAt: '2026-11-01T12:00:00Z',
};
const ended = { ...text, id: 4, name: 'November', question };
const open = {
  ...text,
  id: 5,
  name: 'All nights',
  question: { ...question, fromNight: null, toNight: null },
};
const frozen = { ...printedFinding(), trial: { id: 4, name: 'November' } };

let server: LocalServer;
let router: Router;
let page: VueWrapper | null = null;
let sent: unknown[];

async function show(role: 'analyst' | 'contester'): Promise<VueWrapper> {
  const memberships = [{ ...profileFixture.memberships[0]!, role }];
  takeAccess({ ...signedInFixture(), profile: { ...profileFixture, memberships } });
  page = mount(TrialsView, { attachTo: document.body, global: { plugins: [router] } });
  await expect.poll(() => page!.findAll('.trial-findings').length, { interval: 5 }).toBe(1);
  return page;
}
const card = (name: string) => page!.findAll('li.panel').find((each) => each.get('h2').text() === name)!;
const linksOf = (name: string) =>
  card(name)
    .findAll('a.button')
    .map((link) => [link.text(), router.resolve(link.attributes('href')!).query.nights ?? null]);

beforeEach(async () => {
  sent = [];
  server = await startLocalServer({
    'GET /stations/1/trials': () => ({ body: { items: [ended, open] } }),
    'GET /stations/1/findings?limit=50': () => ({ body: { items: [frozen], next: null } }),
  });
  localStorage.clear();
  sessionStorage.clear();
  setActivePinia(createPinia());
  useSessionStore();
  useStationStore().stationId = 1;
  const empty = { template: '<div />' };
  router = createRouter({
    history: createMemoryHistory(),
    routes: [
      { path: '/s/:stationId/compare', name: 'compare', component: empty },
      { path: '/s/:stationId/reports', name: 'reports', component: empty },
      { path: '/s/:stationId/reports/:findingId', name: 'finding', component: empty },
      { path: '/s/:stationId/methods', name: 'methods', component: empty },
      { path: '/s/:stationId/trials', name: 'trials', component: empty },
    ],
  });
  await router.push('/s/1/trials');
});
afterEach(async () => {
  page?.unmount();
  page = null;
  dropAccess();
  await server.stop();
  document.body.innerHTML = '';
});

describe('the Trials page', () => {
  it('shows what each trial answered when it was frozen', async () => {
    await show('contester');
    expect(card('November').text()).toContain('Last frozen 2026-11-15.');
    expect(card('November').text()).toContain('North-east wire clearly better');
    expect(card('All nights').text()).toContain('Never frozen yet.');
  });

  it('offers the nights since only where a trial has a last night', async () => {
    await show('contester');
    expect(linksOf('November')).toEqual([
      ['Ask it again', '2026-11-01..2026-11-14'],
      ['With the nights since', '2026-11-01..'],
    ]);
    expect(linksOf('All nights')).toEqual([['Ask it again', null]]);
  });

  it('offers a contester nothing to freeze or put away', async () => {
    await show('contester');
    expect(page!.findAll('button')).toHaveLength(0);
  });

  it('freezes a trial once its units are made, and opens the report', async () => {
    const replies: unknown[] = [
      { pending: true, jobId: 5 },
      { ...frozen, id: 12 },
    ];
    const states = ['running', 'done'];
    server.routes['POST /stations/1/findings'] = (body) => {
      sent.push(body);
      return { body: replies.shift() };
    };
    server.routes['GET /stations/1/jobs/5'] = () => ({
      body: {
        ...{ id: 5, kind: 'units', state: states.shift(), attempts: 1, error: null, finishedAt: null },
        ...{ createdAt: '2026-12-01T12:00:00Z', progress: { done: 3, total: 14, secondsLeft: 2 } },
      },
    });
    await show('analyst');
    await page!.get('[aria-label="Freeze November"]').trigger('click');
    const dialog = page!.get('dialog.form-dialog');
    await dialog.get('input').setValue('November, settled');
    await dialog.get('form').trigger('submit');
    await expect.poll(() => dialog.text(), { interval: 5 }).toContain('3 of 14 nights');
    await expect.poll(() => router.currentRoute.value.path, { timeout: 10_000 }).toBe('/s/1/reports/12');
    expect(sent).toHaveLength(2);
    expect(sent[0]).toMatchObject({ title: 'November, settled', note: '', trialId: 4, question });
    await flushPromises();
    expect(page!.find('dialog.form-dialog').exists()).toBe(false);
  });

  it('loses nothing of the title when freezing fails', async () => {
    server.routes['POST /stations/1/findings'] = () => ({
      ...{ status: 409, code: 'nothing-to-freeze' },
      detail: 'There is nothing to freeze yet.',
    });
    await show('analyst');
    await page!.get('[aria-label="Freeze November"]').trigger('click');
    await page!.get('dialog.form-dialog input').setValue('November, settled');
    await page!.get('dialog.form-dialog form').trigger('submit');
    await expect
      .poll(() => page!.get('dialog.form-dialog').text())
      .toContain('There is nothing to freeze yet.');
    await page!
      .findAll('dialog.form-dialog button')
      .find((each) => each.text() === 'Close')!
      .trigger('click');
    await page!.get('[aria-label="Freeze November"]').trigger('click');
    expect(page!.get<HTMLInputElement>('dialog.form-dialog input').element.value).toBe('November, settled');
    expect(page!.get('dialog.form-dialog').text()).not.toContain('There is nothing to freeze yet.');
  });
});
