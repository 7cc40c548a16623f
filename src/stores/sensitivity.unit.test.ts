import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { fixtureAnswer } from '../../shared/pictures/answer.fixture.ts';
import { fixtureSensitivity } from '../../shared/pictures/sensitivity.fixture.ts';
import { startLocalServer, signedInFixture } from '../../tests/helpers/client-server.ts';
import type { LocalServer } from '../../tests/helpers/client-server.ts';
import { takeAccess } from '../api/access.ts';
import { setApiBase } from '../api/url.ts';
import { useSensitivityStore } from './sensitivity.ts';

const { question } = fixtureAnswer();
const path = 'POST /stations/1/comparisons/sensitivity';
const job = (id: number, state: string) => ({
  ...{
    id,
    kind: 'units',
    state,
    attempts: 1,
    error: null,
    createdAt: '2026-11-20T10:00:00Z',
    finishedAt: null,
  },
  progress: state === 'running' ? { done: 4, total: 14, secondsLeft: 60 } : null,
});
const complete = () => {
  const reply = fixtureSensitivity();
  const variants = reply.variants.map((variant) => ({
    ...{ ...variant, state: 'ready' as const, jobId: null },
    estimateDb: variant.estimateDb ?? 1.7,
  }));
  return { ...reply, variants, sentence: 'No choice moves it.' };
};

let server: LocalServer;
beforeEach(async () => {
  setActivePinia(createPinia());
  server = await startLocalServer({});
  takeAccess(signedInFixture());
});
afterEach(async () => {
  setApiBase('/api');
  await server.stop();
});

describe('asking how the answer would be under other choices', () => {
  it('asks nothing by itself', () => {
    expect(useSensitivityStore().state).toBe('idle');
    expect(server.seen).toEqual([]);
  });

  it('asks for units to be made when told so, and follows their jobs until all are ready', async () => {
    const store = useSensitivityStore();
    const prepared: unknown[] = [];
    let done = false;
    server.routes[path] = (body) => {
      prepared.push((body as { prepare: boolean }).prepare);
      return { body: done ? complete() : fixtureSensitivity() };
    };
    for (const id of [41, 42]) {
      server.routes[`GET /stations/1/jobs/${id}`] = () => ({ body: job(id, done ? 'done' : 'running') });
    }
    await store.ask(1, question, true);
    expect(store.state).toBe('ready');
    expect(store.isWaiting).toBe(true);
    store.onJob(41);
    await vi.waitFor(() => expect(store.jobs.size).toBe(2));
    expect(store.jobs.get(41)?.progress).toEqual({ done: 4, total: 14, secondsLeft: 60 });
    expect(prepared).toEqual([true]);
    done = true;
    await store.follow();
    expect(store.isWaiting).toBe(false);
    expect(store.reply?.sentence).toBe('No choice moves it.');
    // Making them was asked for once; afterwards only what has become of them.
    expect(prepared).toEqual([true, false]);
    store.stop();
  });

  it('takes no notice of jobs that belong to others', async () => {
    const store = useSensitivityStore();
    server.routes[path] = () => ({ body: fixtureSensitivity() });
    await store.ask(1, question, false);
    const before = server.seen.length;
    store.onJob(999);
    expect(server.seen).toHaveLength(before);
    store.stop();
  });

  it('looks once for the many events that a job sends while it runs', async () => {
    const store = useSensitivityStore();
    server.routes[path] = () => ({ body: fixtureSensitivity() });
    for (const id of [41, 42]) {
      server.routes[`GET /stations/1/jobs/${id}`] = () => ({ body: job(id, 'running') });
    }
    await store.ask(1, question, true);
    for (let event = 0; event < 10; event += 1) store.onJob(41);
    await vi.waitFor(() => expect(store.jobs.size).toBe(2));
    expect(server.seen.filter((line) => line.endsWith('/jobs/41'))).toHaveLength(1);
    store.stop();
  });

  it('goes on waiting while the units of the question itself are made anew', async () => {
    const store = useSensitivityStore();
    server.routes[path] = () => ({ body: fixtureSensitivity() });
    for (const id of [41, 42]) {
      server.routes[`GET /stations/1/jobs/${id}`] = () => ({ body: job(id, 'done') });
    }
    await store.ask(1, question, true);
    server.routes[path] = () => ({ status: 409, code: 'units-pending', detail: 'They are being made.' });
    await store.follow();
    expect(store.state).toBe('ready');
    expect(store.isWaiting).toBe(true);
    server.routes[path] = () => ({ body: complete() });
    await store.follow();
    expect(store.reply?.sentence).toBe('No choice moves it.');
    store.stop();
  });

  it('asks no more by itself once it has failed', async () => {
    const store = useSensitivityStore();
    server.routes[path] = () => ({ body: fixtureSensitivity() });
    await store.ask(1, question, true);
    server.routes[path] = () => ({ status: 403, detail: 'You may not.' });
    await store.ask(1, question, false);
    expect(store.state).toBe('failed');
    const before = server.seen.length;
    store.onJob(41);
    await store.follow();
    expect(server.seen).toHaveLength(before);
  });

  it('asks again when a job has failed, so that its row says that it is not made', async () => {
    const store = useSensitivityStore();
    server.routes[path] = () => ({ body: fixtureSensitivity() });
    server.routes['GET /stations/1/jobs/41'] = () => ({ body: job(41, 'dead') });
    server.routes['GET /stations/1/jobs/42'] = () => ({ body: job(42, 'running') });
    await store.ask(1, question, true);
    await store.follow();
    expect(server.seen.filter((line) => line === path)).toHaveLength(2);
    store.stop();
  });

  it('keeps what is ready when somebody stops waiting, and asks no more', async () => {
    const store = useSensitivityStore();
    server.routes[path] = () => ({ body: fixtureSensitivity() });
    await store.ask(1, question, true);
    store.stop();
    expect(store.isWaiting).toBe(false);
    expect(store.state).toBe('ready');
    expect(store.reply?.variants.length).toBeGreaterThan(0);
    const before = server.seen.length;
    await store.follow();
    expect(server.seen).toHaveLength(before);
  });

  it('says why it failed and keeps the last reply', async () => {
    const store = useSensitivityStore();
    server.routes[path] = () => ({ body: complete() });
    await store.ask(1, question, false);
    server.routes[path] = () => ({
      ...{ status: 409, code: 'units-pending' },
      detail: 'The units under these rules are being made. Try again when the answer shows.',
    });
    await store.ask(1, question, false);
    expect(store.state).toBe('failed');
    expect(store.problem?.message).toContain('are being made');
    expect(store.reply?.sentence).toBe('No choice moves it.');
  });

  it('forgets everything when another question is asked', async () => {
    const store = useSensitivityStore();
    server.routes[path] = () => ({ body: complete() });
    await store.ask(1, question, false);
    store.forget();
    expect(store.state).toBe('idle');
    expect(store.reply).toBeNull();
  });
});
