// @vitest-environment node
import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { dropAccess } from '../api/access.ts';
import { signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer } from '../../tests/helpers/client-server.ts';
import { useSessionStore } from './session.ts';
import { useStationStore } from './station.ts';

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
const receiver = (id: number, retiredAt: string | null) => ({
  id,
  callSign: 'EI7QSB',
  label: `Receiver ${id}`,
  notes: '',
  retiredAt,
});
const antenna = {
  id: 4,
  name: 'Vertical',
  marker: 'V',
  kind: 'vertical',
  headingDeg: null,
  beamwidthDeg: null,
  lengthM: null,
  heightM: null,
  notes: '',
  inServiceFrom: null,
  inServiceTo: null,
};
const nowOn = (antennaId: number) => ({
  body: {
    items: [
      {
        receiverId: 1,
        dwell: {
          id: 9,
          receiverId: 1,
          antennaId,
          startsAt: '2026-11-30T18:00:00Z',
          endsAt: null,
          source: 'hand',
          note: '',
        },
      },
    ],
  },
});

let server: LocalServer;

beforeEach(async () => {
  server = await startLocalServer({
    'POST /auth/sign-in': () => ({ body: signedInFixture() }),
    'GET /stations/1': () => ({ body: station }),
    'GET /stations/1/receivers': () => ({
      body: { items: [receiver(1, null), receiver(2, '2026-01-01T00:00:00Z')] },
    }),
    'GET /stations/1/antennas': () => ({ body: { items: [antenna] } }),
    'GET /stations/1/now-on': () => nowOn(4),
    'GET /stations/1/feeds': () => ({ body: { items: [] } }),
  });
  setActivePinia(createPinia());
  await useSessionStore().signInWith('analyst@example.org', 'secret');
});
afterEach(async () => {
  useStationStore().close();
  dropAccess();
  await server.stop();
});

describe('the station on the screen', () => {
  it('is loaded with its receivers, antennas and what each receiver is on', async () => {
    const store = useStationStore();
    await store.open(1);
    expect([store.state, store.station?.callSign, store.antennaById.get(4)?.name]).toEqual([
      'ready',
      'EI7QSB',
      'Vertical',
    ]);
    expect(store.activeReceivers.map((each) => each.id)).toEqual([1]);
    await vi.waitFor(() => expect(store.nowOn[0]?.dwell?.antennaId).toBe(4));
  });

  it('allows what the role of the person at that station allows', async () => {
    const store = useStationStore();
    await store.open(1);
    expect([store.role, store.may('trial:write'), store.may('member:manage')]).toEqual([
      'analyst',
      true,
      false,
    ]);
    await store.open(2);
    expect([store.role, store.may('trial:write')]).toEqual(['contester', false]);
  });

  it('follows a switch by asking what the receivers are on, and nothing else', async () => {
    const store = useStationStore();
    await store.open(1);
    await vi.waitFor(() => expect(store.nowOnState).toBe('ready'));
    await vi.waitFor(() => expect(server.seen).toContain('GET /stations/1/feeds'));
    server.seen.length = 0;
    server.routes['GET /stations/1/now-on'] = () => nowOn(5);
    store.follow({ type: 'switch', receiverIds: [1] });
    await vi.waitFor(() => expect(store.nowOn[0]?.dwell?.antennaId).toBe(5));
    expect(server.seen).toEqual(['GET /stations/1/now-on']);
  });

  it('shows nothing of the former station when the next one cannot be read', async () => {
    const store = useStationStore();
    await store.open(1);
    await store.open(2);
    expect([store.state, store.station, store.antennas]).toEqual(['failed', null, []]);
  });

  it('keeps what it has when a later reading fails', async () => {
    const store = useStationStore();
    await store.open(1);
    server.routes['GET /stations/1'] = () => ({ status: 503, detail: 'Starting.' });
    await store.reload();
    expect([store.state, store.problem?.message, store.station?.callSign]).toEqual([
      'failed',
      'Starting.',
      'EI7QSB',
    ]);
  });
});
