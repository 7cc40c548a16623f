import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { printedFinding } from '../../server/features/findings/pdf/printed-finding.fixture.ts';
import type { Decision, FindingSummary, Share } from '../../shared/contracts/finding.ts';
import { signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer } from '../../tests/helpers/client-server.ts';
import { dropAccess, takeAccess } from '../api/access.ts';
import { setApiBase } from '../api/url.ts';
import { fixtureRecomputation } from '../components/findings/recomputation.fixture.ts';
import { useFindingStore } from './finding.ts';
import { useFindingsStore } from './findings.ts';

const frozen = printedFinding();
const line = (id: number) => ({ ...frozen, id }) as unknown as FindingSummary;
const idsOf = (findings: readonly FindingSummary[]) => findings.map(({ id }) => id);
const decision: Decision = {
  id: 2,
  decision: 'keep',
  antennaName: null,
  lookAgainOn: null,
  reason: 'It pays.',
  decidedBy: 'Ann',
  decidedAt: '2026-12-01T12:00:00Z',
};
const job = {
  ...{ id: 5, kind: 'units', attempts: 1, error: null, createdAt: '2026-12-01T12:00:00Z', finishedAt: null },
  progress: { done: 1, total: 4, secondsLeft: 3 },
};
const share: Share = {
  id: '6f0c1f0e-7a55-4c1e-9b5e-2f0f6f3f2a13',
  label: 'The farmer',
  createdBy: 'Ann',
  createdAt: '2026-12-01T12:00:00Z',
  expiresAt: '2026-12-31T12:00:00Z',
  withdrawnAt: null,
  lastReadAt: null,
  timesRead: 0,
};

let server: LocalServer;
beforeEach(async () => {
  setActivePinia(createPinia());
  server = await startLocalServer({
    'GET /stations/1/findings?limit=50': () => ({ body: { items: [line(9), line(8)], next: '8' } }),
    'GET /stations/1/findings?limit=50&after=8': () => ({ body: { items: [line(7)], next: '7' } }),
    'GET /stations/1/findings?limit=200&after=8': () => ({ body: { items: [line(7), line(6)], next: '6' } }),
    'GET /stations/1/findings?limit=200&after=6': () => ({ body: { items: [line(5)], next: null } }),
    'GET /stations/2/findings?limit=50': () => ({ body: { items: [line(30)], next: null } }),
    'GET /stations/1/findings/1': () => ({ body: frozen }),
    'GET /stations/1/findings/1/shares': () => ({ body: { items: [share] } }),
  });
  takeAccess(signedInFixture());
});
afterEach(async () => {
  dropAccess();
  setApiBase('/api');
  await server.stop();
});

describe('the list of findings', () => {
  it('is read page by page, each page after the last finding of the one before', async () => {
    const store = useFindingsStore();
    await store.load(1);
    expect([idsOf(store.findings), store.next]).toEqual([[9, 8], '8']);
    await store.loadMore();
    expect([idsOf(store.findings), store.next]).toEqual([[9, 8, 7], '7']);
  });

  it('is read to its end for whoever looks for something among all', async () => {
    const store = useFindingsStore();
    await store.loadAll(1);
    expect([idsOf(store.findings), store.next]).toEqual([[9, 8, 7, 6, 5], null]);
  });

  it('keeps what was read when a further page fails, and reads on from there', async () => {
    const store = useFindingsStore();
    await store.load(1);
    const { routes } = server;
    server.routes = { ...routes, 'GET /stations/1/findings?limit=50&after=8': () => ({ status: 503 }) };
    await store.loadMore();
    expect([store.state, idsOf(store.findings), store.next]).toEqual(['failed', [9, 8], '8']);
    server.routes = routes;
    await store.loadMore();
    expect([store.state, idsOf(store.findings)]).toEqual(['ready', [9, 8, 7]]);
  });

  it('never shows the findings of one station under the name of another', async () => {
    const store = useFindingsStore();
    await store.load(1);
    const next = store.load(2);
    expect(store.findings).toEqual([]);
    await next;
    expect(idsOf(store.findings)).toEqual([30]);
  });
});

describe('one finding', () => {
  it('shows a decision at once, after the earlier ones', async () => {
    server.routes['POST /stations/1/findings/1/decisions'] = () => ({ body: decision });
    const store = useFindingStore();
    store.open({ stationId: 1, findingId: 1 });
    await store.load();
    await store.decide({ decision: 'keep', reason: 'It pays.' });
    expect(store.finding?.decisions.map(({ id }) => id)).toEqual([1, 2]);
    expect(store.finding?.latestDecision?.decision).toBe('keep');
  });

  it('keeps its decisions when a new one is refused, and says why', async () => {
    server.routes['POST /stations/1/findings/1/decisions'] = () => ({ status: 422, detail: 'Say why.' });
    const store = useFindingStore();
    store.open({ stationId: 1, findingId: 1 });
    await store.load();
    await expect(store.decide({ decision: 'keep', reason: 'x' })).rejects.toMatchObject({
      message: 'Say why.',
    });
    expect(store.finding?.decisions.map(({ id }) => id)).toEqual([1]);
  });

  it('lets go of everything when another one is opened', async () => {
    const store = useFindingStore();
    store.open({ stationId: 1, findingId: 1 });
    await Promise.all([store.load(), store.loadShares()]);
    store.open({ stationId: 1, findingId: 2 });
    expect([store.finding, store.shares, store.now]).toEqual([null, [], null]);
  });

  it('hands out a new link once and keeps no copy of it', async () => {
    const url = 'https://corrib.example/f#a-token-that-nobody-else-has';
    server.routes['POST /stations/1/findings/1/shares'] = () => ({ body: { share, token: 'a-token', url } });
    const store = useFindingStore();
    store.open({ stationId: 1, findingId: 1 });
    expect(await store.share({ label: 'The farmer', days: 30 })).toEqual({ label: 'The farmer', url });
    expect(JSON.stringify([store.shares, store.$state])).not.toContain('a-token');
    expect(store.shares).toEqual([share]);
  });

  it('waits for the units that must be made first, and then asks the data of today again', async () => {
    const answers: unknown[] = [{ pending: true, jobId: 5 }, fixtureRecomputation()];
    const states = ['running', 'done'];
    server.routes['POST /stations/1/findings/1/recompute'] = () => ({ body: answers.shift() });
    server.routes['GET /stations/1/jobs/5'] = () => ({ body: { ...job, state: states.shift() } });
    const store = useFindingStore();
    store.open({ stationId: 1, findingId: 1 });
    await store.askToday();
    expect([store.nowState, store.jobId, store.job?.progress?.total]).toEqual(['loading', 5, 4]);
    await store.follow();
    expect([store.nowState, store.jobId, store.now?.sentence]).toEqual([
      'ready',
      null,
      'Same data, same numbers.',
    ]);
  });
});
