import { flushPromises, mount } from '@vue/test-utils';
import type { VueWrapper } from '@vue/test-utils';
import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { createMemoryHistory, createRouter } from 'vue-router';
import type { Router } from 'vue-router';
import { profileFixture, signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer, Reply } from '../../tests/helpers/client-server.ts';
import type { Antenna } from '../../shared/contracts/antenna.ts';
import { openLadder } from '../../shared/contracts/ladder-url.ts';
import type { Station } from '../../shared/contracts/station.ts';
import { fixtureLadder } from '../../shared/pictures/ladder-answer.fixture.ts';
import { dropAccess, takeAccess } from '../api/access.ts';
import { useLadderStore } from '../stores/ladder.ts';
import { useSessionStore } from '../stores/session.ts';
import { useStationStore } from '../stores/station.ts';
import LadderView from './LadderView.vue';

const station = {
  ...{ id: 1, name: 'Corrib Low Band Group', callSign: 'EI7QSB', locator: 'IO53', sectorCount: 12 },
  ...{ latitudeDeg: 53.5, longitudeDeg: -9, timeZone: 'Europe/Dublin', ituRegion: 1, isDemo: true },
  ...{ guardSeconds: 20, blockMinutes: 15, windowSeconds: 30, freqToleranceKhz: 0.3, marginDb: 1 },
} as Station;
const antenna = (id: number, name: string, marker: string) =>
  ({ id, name, marker, headingDeg: null, inServiceTo: null }) as Antenna;

let server: LocalServer;
let router: Router;
let sent: unknown[];
let answerWith: () => Reply;
let page: VueWrapper | null = null;

beforeEach(() => {
  sent = [];
  answerWith = () => ({ body: fixtureLadder() });
  // happy-dom lays nothing out.
  Element.prototype.scrollIntoView = () => undefined;
});

afterEach(async () => {
  page?.unmount();
  page = null;
  document.body.innerHTML = '';
  dropAccess();
  await server.stop();
});

async function open(query = ''): Promise<VueWrapper> {
  server = await startLocalServer({
    'POST /stations/1/ladder': (body) => {
      sent.push(body);
      return answerWith();
    },
    'GET /stations/1/spots/summary': () => ({ body: { total: 9000, nights: [] } }),
  });
  localStorage.clear();
  setActivePinia(createPinia());
  useSessionStore();
  takeAccess({ ...signedInFixture(), profile: profileFixture });
  const here = useStationStore();
  here.stationId = 1;
  here.station = station;
  here.antennas = [
    antenna(1, 'North-east wire', 'N'),
    antenna(2, 'Vertical', 'V'),
    antenna(3, 'South loop', 'S'),
  ];
  const blank = { template: '<i />' };
  router = createRouter({
    history: createMemoryHistory(),
    routes: [
      { path: '/s/:stationId/ladder', name: 'ladder', component: blank },
      { path: '/s/:stationId/:rest', component: blank },
      ...['compare', 'methods'].map((name) => ({ path: `/s/:stationId/${name}`, name, component: blank })),
    ],
  });
  await router.push(`/s/1/ladder${query}`);
  page = mount(LadderView, { global: { plugins: [router] }, attachTo: document.body });
  return page;
}

/** The page once the first answer stands. */
async function settled(query = ''): Promise<VueWrapper> {
  const shown = await open(query);
  await vi.waitFor(() => expect(useLadderStore().state).toBe('ready'));
  await flushPromises();
  return shown;
}

describe('the Ladder page', () => {
  it('asks what its address says, and says what the address got wrong', async () => {
    const shown = await settled('?band=160&sectors=0,1&reference=2&margin=9999&pair=3,1');
    expect(sent).toEqual([{ ...openLadder, bandMetres: 160, sectors: [0, 1], referenceAntennaId: 2 }]);
    expect(shown.get('.problems').text()).toContain('The address says margin=9999');
    expect(shown.get('.card').text()).toContain('The two you chose');
  });

  it('asks about another band by one tap, and keeps the open pair in the address', async () => {
    const shown = await settled('?band=160&pair=1,3');
    await shown.findAll('[aria-label="Band"] button')[1]!.trigger('click');
    await vi.waitFor(() => expect(sent).toHaveLength(2));
    expect(sent[1]).toEqual({ ...openLadder, bandMetres: 80 });
    expect(router.currentRoute.value.query).toEqual({ band: '80', pair: '1,3' });
  });

  it('writes the pair into the address without asking anew, and takes it out again', async () => {
    const shown = await settled();
    await shown.get('.rung[data-antenna="1"]').trigger('click');
    await shown.get('.rung[data-antenna="3"]').trigger('click');
    await flushPromises();
    expect(router.currentRoute.value.query).toEqual({ pair: '1,3' });
    await shown.get('.card header button').trigger('click');
    await flushPromises();
    expect(router.currentRoute.value.query).toEqual({});
    expect(sent).toHaveLength(1);
  });

  it('asks for values against one antenna', async () => {
    const shown = await settled('?band=160');
    await shown.get('.reference select').setValue('2');
    await vi.waitFor(() => expect(sent).toHaveLength(2));
    expect(sent[1]).toEqual({ ...openLadder, bandMetres: 160, referenceAntennaId: 2 });
  });

  it('offers no refinement that concerns two compared antennas only', async () => {
    const shown = await settled();
    const labels = shown.get('.refinements').text();
    expect(labels).toContain('Margin');
    expect(labels).not.toContain('Zeros');
    expect(labels).not.toContain('Hours of the map');
  });

  it('offers to widen a question that leaves nothing, and keeps its band', async () => {
    answerWith = () => {
      const { counts } = fixtureLadder();
      return { body: fixtureLadder({ components: [], receivers: [], counts: { ...counts, units: 0 } }) };
    };
    const shown = await settled('?band=160&sectors=4');
    expect(shown.text()).toContain('No units for this question');
    await shown
      .findAll('button')
      .find((button) => button.text() === 'Ask about everything')!
      .trigger('click');
    await vi.waitFor(() => expect(sent).toHaveLength(2));
    expect(sent[1]).toEqual({ ...openLadder, bandMetres: 160 });
    // Of an open question it says what keeps the antennas apart instead.
    await vi.waitFor(() => expect(shown.find('.obstacles').exists()).toBe(true));
  });

  it('keeps the old ladder under the reason when asking again fails', async () => {
    const shown = await settled();
    answerWith = () => ({ status: 503, detail: 'The database is away for a moment.' });
    await shown.findAll('[aria-label="Band"] button')[1]!.trigger('click');
    await vi.waitFor(() => expect(shown.text()).toContain('The database is away for a moment.'));
    expect(shown.findAll('.rung').length).toBeGreaterThan(0);
  });

  it('shows how far the units under other rules are', async () => {
    answerWith = () => ({ body: { pending: true, jobId: 5 } });
    const shown = await open('?rules=30,30,0.3,20');
    server.routes['GET /stations/1/jobs/5'] = () => ({
      body: {
        ...{ id: 5, kind: 'units', state: 'running', attempts: 1, error: null, finishedAt: null },
        ...{ createdAt: '2026-11-20T10:00:00Z', progress: { done: 3, total: 9, secondsLeft: null } },
      },
    });
    await vi.waitFor(() => expect(shown.get('.pending').text()).toContain('3 of 9 nights'));
  });
});
