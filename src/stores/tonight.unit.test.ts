import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import type { LivePair } from '../../shared/contracts/tonight.ts';
import { signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer } from '../../tests/helpers/client-server.ts';
import { dropAccess, takeAccess } from '../api/access.ts';
import { mergePairs, pairsKept, useTonightStore } from './tonight.ts';

const pair = (second: number, bandMetres = 160): LivePair => ({
  ...{ at: new Date(Date.UTC(2026, 10, 30, 18, 0, second)).toISOString(), call: 'EA8QSH', country: null },
  ...{ bandMetres, azimuthDeg: null, sector: null, antennaA: 1, antennaB: 2, receiverA: 1, receiverB: 2 },
  ...{ snrADb: 20, snrBDb: 18, differenceDb: 2 },
});
const answer = (pairs: LivePair[]) => ({
  at: '2026-11-30T18:00:00Z',
  night: '2026-11-30',
  sun: { sunset: null, sunrise: null, altitudeDeg: -40, darknessLeftMinutes: null, minutesToSunset: null },
  ...{ receivers: [], about: 'this hour', bands: [], pairs },
});

describe('pairs as they arrive', () => {
  it('stand newest first, each once', () => {
    const merged = mergePairs([pair(2), pair(1)], [pair(3), pair(2)]);
    expect(merged.map(({ at }) => at.slice(17, 19))).toEqual(['03', '02', '01']);
  });

  it('are bounded for each band, however long they run, and a busy band does not push out a quiet one', () => {
    let kept: LivePair[] = [pair(0, 40)];
    for (let second = 1; second <= 5000; second++) kept = mergePairs(kept, [pair(second)]);
    expect(kept).toHaveLength(pairsKept + 1);
    expect(kept.at(-1)!.bandMetres).toBe(40);
    expect(kept[0]!.at).toBe(pair(5000).at);
  });
});

describe('tonight', () => {
  let server: LocalServer;
  beforeEach(async () => {
    setActivePinia(createPinia());
    server = await startLocalServer({});
    takeAccess(signedInFixture());
  });
  afterEach(async () => {
    dropAccess();
    await server.stop();
  });

  it('keeps live pairs that the next answer does not have', async () => {
    server.routes['GET /stations/1/tonight'] = () => ({ body: answer([pair(1)]) });
    const store = useTonightStore();
    await store.load(1, null);
    store.append([pair(9)]);
    await store.load(1, null);
    expect(store.pairs.map(({ at }) => at.slice(17, 19))).toEqual(['09', '01']);
  });

  it('asks about the antenna that the advice is measured against', async () => {
    server.routes['GET /stations/1/tonight?inUse=4'] = () => ({ body: answer([]) });
    const store = useTonightStore();
    await store.load(1, 4);
    expect(store.problem?.message).toBeUndefined();
    expect(store.state).toBe('ready');
    expect(server.seen).toEqual(['GET /stations/1/tonight?inUse=4']);
  });

  it('keeps the last answer when a later question fails, and says why', async () => {
    server.routes['GET /stations/1/tonight'] = () => ({ body: answer([pair(1)]) });
    const store = useTonightStore();
    await store.load(1, null);
    server.routes['GET /stations/1/tonight'] = () => ({ status: 503, detail: 'The database is restarting.' });
    await store.load(1, null);
    expect(store.state).toBe('failed');
    expect(store.problem?.message).toBe('The database is restarting.');
    expect(store.answer?.night).toBe('2026-11-30');
  });

  it('takes no pairs once it has been left', async () => {
    server.routes['GET /stations/1/tonight'] = () => ({ body: answer([]) });
    const store = useTonightStore();
    await store.load(1, null);
    store.leave();
    store.append([pair(1)]);
    expect(store.pairs).toEqual([]);
  });
});
