import { flushPromises, mount } from '@vue/test-utils';
import type { VueWrapper } from '@vue/test-utils';
import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { createMemoryHistory, createRouter } from 'vue-router';
import { profileFixture, signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer, Reply } from '../../tests/helpers/client-server.ts';
import type { Role } from '../../shared/contracts/permission.ts';
import { dropAccess, takeAccess } from '../api/access.ts';
import { useSessionStore } from '../stores/session.ts';
import { useStationStore } from '../stores/station.ts';
import StationView from './StationView.vue';

const station = {
  id: 1,
  name: 'Corrib Low Band Group',
  callSign: 'EI7QSB',
  locator: 'IO53',
  latitudeDeg: 53.5,
  longitudeDeg: -9,
  timeZone: 'Europe/Dublin',
  ituRegion: 1,
  guardSeconds: 20,
  blockMinutes: 15,
  windowSeconds: 30,
  freqToleranceKhz: 0.3,
  marginDb: 1,
  sectorCount: 12,
  isDemo: true,
};
const wire = {
  id: 4,
  name: 'North-east wire',
  marker: 'N',
  kind: 'long wire',
  headingDeg: 45,
  beamwidthDeg: 70,
  lengthM: 176.784,
  heightM: null,
  notes: 'rope renewed',
  inServiceFrom: null,
  inServiceTo: null,
};
const feed = {
  id: 2,
  name: 'Shed computer',
  host: 'feed.example.org',
  port: 7300,
  loginCall: 'EI7QSB',
  enabled: true,
  health: null,
};

let server: LocalServer;
let sent: unknown[];
let onSave: () => Reply;
let page: VueWrapper | null = null;

beforeEach(async () => {
  sent = [];
  onSave = () => ({ body: wire });
  const keep = (reply: () => Reply) => (body: unknown) => {
    sent.push(body);
    return reply();
  };
  server = await startLocalServer({
    'GET /stations/1': () => ({ body: station }),
    'GET /stations/1/receivers': () => ({
      body: { items: [{ id: 1, callSign: 'EI7QSB', label: 'Shed', notes: '', retiredAt: null }] },
    }),
    'GET /stations/1/antennas': () => ({ body: { items: [wire] } }),
    'GET /stations/1/feeds': () => ({ body: { items: [feed] } }),
    'GET /stations/1/positions': () => ({ body: { items: [] } }),
    'GET /stations/1/now-on': () => ({ body: { items: [] } }),
    'PATCH /stations/1': keep(() => ({ body: station })),
    'PATCH /stations/1/antennas/4': keep(() => onSave()),
    'DELETE /stations/1/antennas/4': keep(() => onSave()),
    'PATCH /stations/1/feeds/2': keep(() => ({ body: { ...feed, enabled: false } })),
  });
  localStorage.clear();
  sessionStorage.clear();
  setActivePinia(createPinia());
});
afterEach(async () => {
  page?.unmount();
  page = null;
  dropAccess();
  await server.stop();
  document.body.innerHTML = '';
});

async function open(role: Role, part: string, lengthUnit: 'm' | 'ft' = 'm'): Promise<VueWrapper> {
  const memberships = [{ ...profileFixture.memberships[0]!, role }];
  useSessionStore();
  takeAccess({ ...signedInFixture(), profile: { ...profileFixture, lengthUnit, memberships } } as never);
  await useStationStore().open(1);
  const router = createRouter({
    history: createMemoryHistory(),
    routes: [{ path: '/:rest(.*)*', component: { template: '<div />' } }],
  });
  await router.push(`/s/1/station?part=${part}`);
  page = mount(StationView, { attachTo: document.body, global: { plugins: [router] } });
  await flushPromises();
  return page;
}
/** Until all that is under way has come back from the local server. */
async function settled(done: () => boolean): Promise<void> {
  await expect.poll(done, { interval: 5 }).toBe(true);
  await flushPromises();
}
const buttons = (view: VueWrapper) => view.findAll('button').map((each) => each.text());
const press = async (view: VueWrapper, words: string) => {
  const found = view
    .findAll('button')
    .find((each) => (each.attributes('aria-label') ?? each.text()) === words);
  if (!found) throw new Error(`There is no button "${words}" among ${buttons(view).join(', ')}.`);
  await (found.attributes('type') === 'submit'
    ? view.get('dialog form').trigger('submit')
    : found.trigger('click'));
  await flushPromises();
};
const field = (view: VueWrapper, label: string) => {
  const found = view.findAll('label').find((each) => each.text().startsWith(label));
  return view.get(`[id="${found!.attributes('for')}"]`);
};

describe('the Station page', () => {
  it('shows whoever may not change the station all of it, the cautions too, and no dead buttons', async () => {
    for (const part of ['antennas', 'receivers', 'feeds', 'position', 'corrections']) {
      const view = await open('contester', part);
      if (part === 'corrections') await settled(() => view.text().includes('No corrections'));
      expect(buttons(view), part).toEqual([]);
      view.unmount();
    }
    const view = await open('contester', 'antennas');
    expect(view.text()).toContain('North-east wire');
    expect(view.get('svg[role=img]').attributes('aria-label')).toBe('Points to 045°, beamwidth 70°');
    expect(view.get('aside').text()).toContain('licensed electrician');
  });

  it('lets an analyst correct positions and nothing else', async () => {
    const view = await open('analyst', 'corrections');
    await settled(() => view.text().includes('No corrections'));
    expect(buttons(view)).toEqual(['Add the correction']);
  });

  it('sends only what was changed, in metres when feet are typed', async () => {
    const view = await open('manager', 'antennas', 'ft');
    expect(view.text()).toContain('580\u2009ft');
    await press(view, 'Edit North-east wire');
    expect((field(view, 'Length').element as HTMLInputElement).value).toBe('580');
    await field(view, 'Height').setValue('10');
    await press(view, 'Save');
    await settled(() => !view.find('dialog').exists());
    expect(sent).toEqual([{ heightM: 3.048 }]);
  });

  it('names the limit of a length in feet when feet are typed', async () => {
    const view = await open('manager', 'antennas', 'ft');
    await press(view, 'Edit North-east wire');
    await field(view, 'Length').setValue('7000');
    await field(view, 'Height').setValue('985');
    await press(view, 'Save');
    // The limits are 2000 m and 300 m; a foot is 0.3048 m.
    expect(view.get('dialog').text()).toContain('Give at most 6561 feet.');
    expect(view.get('dialog').text()).toContain('Give at most 984 feet.');
    expect(view.get('dialog').text()).not.toContain('metres');
    expect(sent).toEqual([]);
  });

  it("puts the server's sentence beside its field and keeps all that was typed, even after leaving", async () => {
    onSave = () => ({
      status: 409,
      detail: 'Some fields have to change.',
      errors: [{ path: 'body.name', message: 'The station has an antenna with this name already.' }],
    });
    let view = await open('manager', 'antennas');
    await press(view, 'Edit North-east wire');
    await field(view, 'Name').setValue('Vertical');
    await press(view, 'Save');
    await settled(() => field(view, 'Name').attributes('aria-invalid') === 'true');
    const name = field(view, 'Name');
    const described = name.attributes('aria-describedby')!.split(' ')[0]!;
    expect(view.get(`[id="${described}"]`).text()).toBe('The station has an antenna with this name already.');
    expect((name.element as HTMLInputElement).value).toBe('Vertical');
    view.unmount();

    view = await open('manager', 'antennas');
    await press(view, 'Edit North-east wire');
    expect((field(view, 'Name').element as HTMLInputElement).value).toBe('Vertical');
    expect(view.get('dialog').text()).toContain('your changes from before');
    await press(view, 'Go back to what is stored');
    expect((field(view, 'Name').element as HTMLInputElement).value).toBe('North-east wire');
  });

  it('says before a rule is saved what will be made anew', async () => {
    const view = await open('manager', 'position');
    await press(view, 'Edit the rules');
    expect(view.get('dialog').text()).not.toContain('made anew');
    await field(view, 'Guard').setValue('30');
    expect(view.get('dialog').text()).toContain('The units of every night are made anew');
    await field(view, 'Guard').setValue('601');
    await press(view, 'Save');
    expect(view.get('dialog').text()).toContain('Give a number from 0 to 600.');
    expect(sent).toEqual([]);
    await field(view, 'Guard').setValue('45');
    await press(view, 'Save');
    await settled(() => !view.find('dialog').exists());
    expect(sent).toEqual([{ guardSeconds: 45 }]);
  });

  it('asks before an antenna is removed, and says why it stays', async () => {
    onSave = () => ({ status: 409, detail: 'The switch log names this antenna.' });
    const view = await open('manager', 'antennas');
    await press(view, 'Remove North-east wire');
    expect(sent).toEqual([]);
    await press(view, 'Remove');
    await settled(() => view.find('dialog [role=alert]').exists());
    expect(view.get('dialog [role=alert]').text()).toContain('The switch log names this antenna.');
    await press(view, 'Cancel');
    expect(view.find('dialog').exists()).toBe(false);
  });

  it('switches a feed off with one press', async () => {
    const view = await open('manager', 'feeds');
    await press(view, 'Switch off Shed computer');
    await settled(() => sent.length === 1);
    expect(sent).toEqual([{ enabled: false }]);
  });
});
