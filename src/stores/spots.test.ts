import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import type { SpotRow } from '../../shared/contracts/spot.ts';
import { signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer } from '../../tests/helpers/client-server.ts';
import { dropAccess, takeAccess } from '../api/access.ts';
import { everySpot } from '../components/spots/spot-filter.ts';
import { useSpotsStore } from './spots.ts';

let server: LocalServer;

beforeEach(async () => {
  server = await startLocalServer({});
  takeAccess(signedInFixture());
  setActivePinia(createPinia());
});
afterEach(async () => {
  dropAccess();
  await server.stop();
});

const spot = (second: number): SpotRow => ({
  heardAt: new Date(Date.UTC(2026, 10, 30, 18, 0, second)).toISOString(),
  receiverId: 1,
  call: 'EA8QSH',
  bandMetres: 160,
  freqKhz: 1824.5,
  mode: 'CW',
  snrDb: 21,
  speedWpm: 22,
  uncertaintySeconds: 0,
  importId: null,
  country: 'Canary Islands',
  azimuthDeg: 190,
  distanceKm: 2900,
  bearingUnsure: false,
  tag: 'tagged',
  antennaId: 1,
  why: '40 s after the switch to Vertical, past the guard of 20 s.',
});
const seconds = (rows: readonly SpotRow[]) => rows.map(({ heardAt }) => Number(heardAt.slice(17, 19)));
const page = (from: number, count: number, next: string | null) => ({
  body: { items: Array.from({ length: count }, (_, index) => spot(from - index)), next },
});
const first = 'GET /stations/1/spots?limit=100';
const after = (cursor: string) => `GET /stations/1/spots?after=${cursor}&limit=100`;

describe('spots under a filter', () => {
  it('asks the server with the filter and reads on by its cursor', async () => {
    const store = useSpotsStore();
    server.routes = {
      'GET /stations/1/spots?bandMetres=160&call=EA8QSH&tag=guarded&limit=100': () => page(30, 2, 'c1'),
      'GET /stations/1/spots?bandMetres=160&call=EA8QSH&tag=guarded&after=c1&limit=100': () =>
        page(20, 1, null),
    };
    await store.load(1, { ...everySpot, bandMetres: 160, call: 'EA8QSH', tag: 'guarded' });
    await store.more();
    expect([seconds(store.rows), store.next, store.state]).toEqual([[30, 29, 20], null, 'ready']);
  });

  it('goes on by itself through pages in which the server found nothing, but not for ever', async () => {
    const store = useSpotsStore();
    const empty = (next: string) => () => ({ body: { items: [], next } });
    server.routes = { [first]: empty('a'), [after('a')]: empty('b'), [after('b')]: () => page(9, 1, null) };
    await store.load(1, everySpot);
    expect(seconds(store.rows)).toEqual([9]);
    server.seen.length = 0;
    server.routes = { [first]: empty('a'), [after('a')]: empty('a') };
    await store.load(1, everySpot);
    expect([server.seen.length, store.rows, store.next]).toEqual([5, [], 'a']);
  });

  it('keeps the rows that it had, and says why, when asking fails', async () => {
    const store = useSpotsStore();
    server.routes = { [first]: () => page(9, 2, null) };
    await store.load(1, everySpot);
    server.routes = { [first]: () => ({ status: 400, detail: 'The end lies before the start.' }) };
    await store.load(1, everySpot);
    expect([store.state, store.problem?.message, store.rows.length]).toEqual([
      'failed',
      'The end lies before the start.',
      2,
    ]);
  });

  it('shows nothing of one station under the name of another', async () => {
    const store = useSpotsStore();
    server.routes = {
      [first]: () => page(9, 2, null),
      'GET /stations/2/spots?limit=100': () => page(1, 1, null),
    };
    await store.load(1, everySpot);
    const other = store.load(2, everySpot);
    expect(store.rows).toEqual([]);
    await other;
    expect(seconds(store.rows)).toEqual([1]);
  });
});

describe('live spots', () => {
  it('are put on top of those that are shown, and what was read further down stays', async () => {
    const store = useSpotsStore();
    server.routes = { [first]: () => page(20, 3, 'c1'), [after('c1')]: () => page(10, 2, 'c2') };
    await store.load(1, everySpot);
    await store.more();
    server.routes = { [first]: () => page(22, 4, 'c9') };
    await store.refresh();
    expect([seconds(store.rows), store.next, store.lastNew]).toEqual([[22, 21, 20, 19, 18, 10, 9], 'c2', 2]);
  });

  it('begin the list anew where more came than a page holds: no hole is hidden', async () => {
    const store = useSpotsStore();
    server.routes = { [first]: () => page(20, 3, 'c1') };
    await store.load(1, everySpot);
    server.routes = { [first]: () => page(50, 3, 'c9') };
    await store.refresh();
    expect([seconds(store.rows), store.next]).toEqual([[50, 49, 48], 'c9']);
  });

  it('leave the list alone when nothing came', async () => {
    const store = useSpotsStore();
    server.routes = { [first]: () => page(20, 3, 'c1') };
    await store.load(1, everySpot);
    const before = store.rows;
    await store.refresh();
    expect(store.rows).toBe(before);
    expect(store.lastNew).toBe(0);
  });
});
