import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import type { Dwell } from '../../shared/contracts/dwell.ts';
import { signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer } from '../../tests/helpers/client-server.ts';
import { dropAccess, takeAccess } from '../api/access.ts';
import { useSwitchingStore } from './switching.ts';

const hour = 3_600_000;
const start = Date.parse('2026-11-30T18:00:00Z');
const stretch = { fromMs: start, toMs: start + 2 * hour };
const dwell = (id: number, antennaId: number, startMs: number, endMs: number | null): Dwell => ({
  ...{ id, receiverId: 1, antennaId, source: 'hand', note: '' },
  startsAt: new Date(startMs).toISOString(),
  endsAt: endMs === null ? null : new Date(endMs).toISOString(),
});
const counted = {
  ...{ spotsChangingAntenna: 0, spotsGainingAntenna: 0, spotsLosingAntenna: 0, spotsChangingGuard: 0 },
  ...{ blocksTouched: 0, nightsTouched: [], warnings: [] },
};
const batchId = '0b9a4d2e-7c9f-4d59-9b59-3e2c9a1c1a11';

let server: LocalServer;
let log: Dwell[];
let applied: unknown[];

beforeEach(async () => {
  setActivePinia(createPinia());
  log = [];
  applied = [];
  server = await startLocalServer({});
  // The query of a list of dwells depends on the clock: any of them is answered.
  server.routes = new Proxy(
    {
      'POST /stations/1/dwells/changes': (body: unknown) => {
        applied.push(body);
        return { body: { batchId, dwells: [], preview: counted } };
      },
      'GET /stations/1/dwells/history?limit=20': () => ({ body: { items: [], next: null } }),
    } as LocalServer['routes'],
    {
      get: (routes, line: string) =>
        routes[line] ??
        (line.startsWith('GET /stations/1/dwells?')
          ? () => ({ body: { items: log, truncated: false } })
          : undefined),
    },
  );
  takeAccess(signedInFixture());
});
afterEach(async () => {
  dropAccess();
  await server.stop();
});
const lists = () => server.seen.filter((line) => line.startsWith('GET /stations/1/dwells?'));

describe('the stretch of the switch log in sight', () => {
  it('loads half a stretch more on either side and asks no more while moving inside it', async () => {
    log = [dwell(1, 1, start, null)];
    const store = useSwitchingStore();
    await store.show(1, stretch);
    expect(store.dwells).toHaveLength(1);
    expect(store.loaded).toEqual({ fromMs: start - hour, toMs: start + 3 * hour });
    await store.show(1, { fromMs: start + hour, toMs: start + 3 * hour });
    expect(lists()).toHaveLength(1);
    await store.show(1, { fromMs: start + 2 * hour, toMs: start + 4 * hour });
    expect(lists()).toHaveLength(2);
  });

  it('keeps what it has, and says why, when the server fails', async () => {
    log = [dwell(1, 1, start, null)];
    const store = useSwitchingStore();
    await store.show(1, stretch);
    await server.stop();
    await store.reload();
    expect(store.state).toBe('failed');
    expect(store.problem?.message).toContain('The server did not answer.');
    expect(store.dwells).toHaveLength(1);
  });

  it('forgets everything when it is left', async () => {
    log = [dwell(1, 1, start, null)];
    const store = useSwitchingStore();
    await store.show(1, stretch);
    store.leave();
    expect(store.dwells).toEqual([]);
    expect(store.loaded).toBeNull();
  });
});

describe('taking a switch back', () => {
  it('deletes the dwell that the switch opened and opens the one before it again', async () => {
    const logged = dwell(9, 2, start + hour, null);
    log = [dwell(7, 3, start - hour, start), dwell(8, 1, start, start + hour), logged];
    await useSwitchingStore().undoSwitch(1, 1, logged);
    expect(applied).toEqual([
      {
        changes: [
          { action: 'delete', dwellId: 9 },
          { action: 'edit', dwellId: 8, endsAt: null },
        ],
      },
    ]);
  });

  it('only deletes it where the receiver was disconnected before', async () => {
    const logged = dwell(9, 2, start + hour, null);
    log = [dwell(8, 1, start, start + hour / 2), logged];
    await useSwitchingStore().undoSwitch(1, 1, logged);
    expect(applied).toEqual([{ changes: [{ action: 'delete', dwellId: 9 }] }]);
  });

  it('opens the last dwell again after a disconnection', async () => {
    log = [dwell(7, 3, start - hour, start), dwell(8, 1, start, start + hour)];
    await useSwitchingStore().undoSwitch(1, 1, null);
    expect(applied).toEqual([{ changes: [{ action: 'edit', dwellId: 8, endsAt: null }] }]);
  });

  it('refuses, changing nothing, when the receiver has been switched again since', async () => {
    const logged = dwell(9, 2, start + hour, null);
    log = [dwell(8, 1, start, start + hour), { ...logged, endsAt: new Date(start + 2 * hour).toISOString() }];
    log.push(dwell(10, 3, start + 2 * hour, null));
    const store = useSwitchingStore();
    await expect(store.undoSwitch(1, 1, logged)).rejects.toMatchObject({ code: 'switched-since' });
    await expect(store.undoSwitch(1, 1, null)).rejects.toMatchObject({ code: 'switched-since' });
    expect(applied).toEqual([]);
  });

  it('loads log and history anew after a change', async () => {
    const store = useSwitchingStore();
    await store.show(1, stretch);
    await store.apply(1, [{ action: 'delete', dwellId: 9 }]);
    await vi.waitFor(() => expect(store.historyState).toBe('ready'));
    expect(lists()).toHaveLength(2);
  });
});
