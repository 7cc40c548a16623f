import { flushPromises, mount } from '@vue/test-utils';
import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { createMemoryHistory, createRouter } from 'vue-router';
import type { ImportMapping, ImportPreview, ImportRecord } from '../../shared/contracts/import.ts';
import { signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer, Reply } from '../../tests/helpers/client-server.ts';
import { dropAccess, takeAccess } from '../api/access.ts';
import { recordFixture } from '../components/imports/record.fixture.ts';
import { useImportsStore } from '../stores/imports.ts';
import { useSessionStore } from '../stores/session.ts';
import { useStationStore } from '../stores/station.ts';
import ImportView from './ImportView.vue';

const guess: ImportMapping = {
  kind: 'spots',
  layout: 'table',
  format: {
    encoding: 'utf-8',
    delimiter: ',',
    quote: '"',
    hasHeader: true,
    skipLines: 0,
    decimalComma: false,
  },
  time: { kind: 'iso', zone: 'UTC' },
  columns: { time: 'utc', receiver: 'rx', call: 'call', freq: 'khz', snr: 'snr' },
  freqUnit: 'kHz',
  receiverNames: {},
  otherReceivers: 'refuse',
  timeKnownTo: 'second',
};
const preview: ImportPreview = {
  guess,
  header: ['utc', 'rx', 'call', 'khz', 'snr', 'level'],
  rows: [{ lineNo: 2, raw: '', cells: ['2026-11-30T18:05:00Z', 'EI7QSA', 'EA8QSH', '1824.5', '21', '22'] }],
  read: [{ lineNo: 2, ok: true, reason: null, field: null, values: { call: 'EA8QSH' } }],
  unknownReceivers: [],
  unknownAntennas: [],
};
const fresh = recordFixture({ state: 'uploaded', rowsRead: 0, rowsStored: 0, rowsRefused: 0, jobId: null });

let server: LocalServer;
let record: ImportRecord;
let asked: unknown[];
let onStart: (body: unknown) => Reply;

beforeEach(async () => {
  record = fresh;
  asked = [];
  onStart = () => ({ body: recordFixture({ state: 'queued', jobId: 4 }) });
  server = await startLocalServer({
    'POST /auth/sign-in': () => ({ body: signedInFixture() }),
    'GET /stations/1/imports/7': () => ({ body: record }),
    'GET /stations/1/mappings': () => ({ body: { items: [] } }),
    'POST /stations/1/imports/7/preview': (body) => {
      asked.push((body as { mapping?: unknown }).mapping);
      return { body: preview };
    },
    'POST /stations/1/imports/7/start': (body) => onStart(body),
    'GET /stations/1/jobs/4': () => ({
      body: {
        id: 4,
        kind: 'import-undo',
        state: 'running',
        attempts: 1,
        progress: null,
        error: null,
        createdAt: '2026-12-01T09:00:00Z',
        finishedAt: null,
      },
    }),
  });
  localStorage.clear();
  setActivePinia(createPinia());
  takeAccess(signedInFixture());
  await useSessionStore().signInWith('analyst@example.org', 'secret');
});
afterEach(async () => {
  dropAccess();
  await server.stop();
  document.body.innerHTML = '';
});

async function open() {
  useStationStore().stationId = 1;
  const page = { template: '<div />' };
  const router = createRouter({
    history: createMemoryHistory(),
    routes: [
      { path: '/imports', name: 'imports', component: page },
      { path: '/imports/:importId', name: 'import', component: page },
      { path: '/spots', name: 'spots', component: page },
    ],
  });
  await router.push('/imports/7');
  const shown = mount(ImportView, { attachTo: document.body, global: { plugins: [router] } });
  return shown;
}
const control = (shown: Awaited<ReturnType<typeof open>>, label: string) => {
  const found = shown.findAll('label').find((each) => each.text().startsWith(label))!;
  return shown.get<HTMLSelectElement>(`#${found.attributes('for')}`);
};
const button = (shown: Awaited<ReturnType<typeof open>>, word: string) =>
  shown.findAll('button').find((each) => each.text() === word);

describe('the page of one import', () => {
  it('fills in the guess, asks again under each change, and keeps the change for later', async () => {
    const shown = await open();
    await vi.waitFor(() => expect(shown.text()).toContain('Of the first 1 line, 1 can be taken.'));
    expect(asked).toEqual([undefined]);
    await control(shown, 'SNR').setValue('5');
    expect(shown.get('[aria-busy=true] .scroll').classes()).toContain('stale');
    await vi.waitFor(() => expect(asked).toHaveLength(2));
    expect(asked[1]).toMatchObject({ columns: { ...guess.columns, snr: 'level' } });
    shown.unmount();
    expect(useImportsStore().draftOf(1, 7)).toMatchObject({ columns: { snr: 'level' } });
    const again = await open();
    await vi.waitFor(() => expect(asked).toHaveLength(3));
    expect(asked[2]).toMatchObject({ columns: { snr: 'level' } });
    again.unmount();
  });

  it('shows why a start was refused and loses nothing of the mapping', async () => {
    onStart = () => ({ status: 409, detail: 'This import is at work already.' });
    const shown = await open();
    await vi.waitFor(() => expect(shown.text()).toContain('can be taken'));
    await button(shown, 'Start the import')!.trigger('click');
    await vi.waitFor(() => expect(shown.find('[role=alert]').exists()).toBe(true));
    expect(shown.get('[role=alert]').text()).toContain('This import is at work already.');
    expect(control(shown, 'SNR').element.value).toBe('4');
    shown.unmount();
  });

  it('shows the waiting import in place of its mapping once it was started', async () => {
    const shown = await open();
    await vi.waitFor(() => expect(shown.text()).toContain('can be taken'));
    await button(shown, 'Start the import')!.trigger('click');
    await vi.waitFor(() => expect(shown.text()).toContain('Waiting for its turn'));
    expect(button(shown, 'Start the import')).toBeUndefined();
    shown.unmount();
  });

  it('tells an import that is being taken back from one that is done, and offers no second undo', async () => {
    record = recordFixture({ rowsRefused: 0, rowsUndone: 22 });
    const shown = await open();
    await vi.waitFor(() => expect(shown.text()).toContain('22 of 88 spots removed.'));
    expect(button(shown, 'Undo this import')).toBeUndefined();
    shown.unmount();
  });

  it('says that the very bytes were brought in before', async () => {
    record = { ...fresh, sameAsImportId: 3 };
    const shown = await open();
    await vi.waitFor(() =>
      expect(shown.text()).toContain('These very bytes were brought in before, as import 3'),
    );
    shown.unmount();
    await flushPromises();
  });
});
