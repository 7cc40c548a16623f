import { createServer } from 'node:http';
import type { IncomingMessage, Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { setApiBase } from '../api/url.ts';
import { takeAccess } from '../api/access.ts';
import { fixtureAnswer } from '../../shared/pictures/answer.fixture.ts';
import { useComparisonStore } from './comparison.ts';
import { useTrialsStore } from './trials.ts';

type Reply = [status: number, body: unknown];
let server: Server;
let answerTo: (method: string, path: string, body: unknown) => Reply | Promise<Reply>;
let asked: string[];

async function bodyOf(request: IncomingMessage): Promise<unknown> {
  let text = '';
  for await (const chunk of request) text += String(chunk);
  return text === '' ? undefined : JSON.parse(text);
}

beforeEach(async () => {
  asked = [];
  setActivePinia(createPinia());
  server = createServer((request, response) => {
    void bodyOf(request).then(async (body) => {
      const path = request.url!.replace('/api', '');
      asked.push(`${request.method} ${path}`);
      const [status, reply] = await answerTo(request.method!, path, body);
      const type = status >= 400 ? 'application/problem+json' : 'application/json';
      response.writeHead(status, { 'content-type': type });
      response.end(status === 204 ? undefined : JSON.stringify(reply));
    });
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  setApiBase(`http://127.0.0.1:${(server.address() as AddressInfo).port}/api`);
  takeAccess({
    accessToken: 'token-of-this-test',
    expiresAt: new Date(Date.now() + 600_000).toISOString(),
    profile: {
      id: '0b9a4d2e-7c9f-4d59-9b59-3e2c9a1c1a11',
      email: 'analyst@example.org',
      name: 'Analyst',
      lengthUnit: 'm',
      theme: 'system',
      createdAt: '2026-01-01T00:00:00Z',
      memberships: [],
    },
  });
});

afterEach(async () => {
  setApiBase('/api');
  server.closeAllConnections();
  await new Promise((resolve) => server.close(resolve));
});

const { question } = fixtureAnswer();
const running = {
  id: 5,
  kind: 'units',
  state: 'running',
  attempts: 1,
  error: null,
  createdAt: '2026-11-20T10:00:00Z',
  finishedAt: null,
};

describe('asking a comparison', () => {
  it('keeps the old answer until the new one is there, and when asking fails', async () => {
    const store = useComparisonStore();
    answerTo = () => [200, fixtureAnswer()];
    await store.ask(1, question);
    expect(store.state).toBe('ready');
    answerTo = () => {
      expect(store.state).toBe('loading');
      expect(store.answer?.marginDb).toBe(1);
      return [
        422,
        {
          type: 'about:blank',
          title: 'No',
          status: 422,
          code: 'invalid',
          detail: 'The station has no such antenna.',
        },
      ];
    };
    await store.ask(1, { ...question, antennaB: 9 });
    expect(store.state).toBe('failed');
    expect(store.problem?.message).toBe('The station has no such antenna.');
    expect(store.answer?.marginDb).toBe(1);
  });

  it('never shows the answer of one station under the name of another', async () => {
    const store = useComparisonStore();
    answerTo = () => [200, fixtureAnswer()];
    await store.ask(1, question);
    answerTo = () => [200, fixtureAnswer({ marginDb: 2 })];
    const next = store.ask(2, question);
    expect(store.answer).toBeNull();
    await next;
    expect(store.answer?.marginDb).toBe(2);
  });

  it('drops the answer to an older question that comes late', async () => {
    const store = useComparisonStore();
    let release: () => void = () => undefined;
    const held = new Promise<void>((resolve) => (release = resolve));
    answerTo = async (_method, _path, body) => {
      const margin = (body as { marginDb: number | null }).marginDb;
      if (margin === 3) await held;
      return [200, fixtureAnswer({ marginDb: margin ?? 1 })];
    };
    const older = store.ask(1, { ...question, marginDb: 3 });
    await vi.waitFor(() => expect(asked).toHaveLength(1));
    await store.ask(1, { ...question, marginDb: 5 });
    release();
    await older;
    expect(store.answer?.marginDb).toBe(5);
    expect(store.state).toBe('ready');
  });

  it('asks again quietly when units have changed', async () => {
    const store = useComparisonStore();
    answerTo = () => [200, fixtureAnswer()];
    await store.ask(1, question);
    answerTo = () => {
      expect(store.state).toBe('ready');
      return [200, fixtureAnswer({ marginDb: 4 })];
    };
    await store.refresh();
    expect(store.answer?.marginDb).toBe(4);
  });
});

describe('units under other rules', () => {
  it('are waited for, with their progress, and the answer follows', async () => {
    const store = useComparisonStore();
    let state = 'running';
    answerTo = (_method, path) => {
      if (path.includes('/jobs/'))
        return [200, { ...running, state, progress: { done: 4, total: 14, secondsLeft: 60 } }];
      return state === 'done' ? [200, fixtureAnswer()] : [202, { pending: true, jobId: 5 }];
    };
    await store.ask(1, question);
    expect(store.jobId).toBe(5);
    expect(store.state).toBe('loading');
    expect(store.job?.progress).toEqual({ done: 4, total: 14, secondsLeft: 60 });
    state = 'done';
    await store.follow();
    expect(store.state).toBe('ready');
    expect(store.jobId).toBeNull();
    expect(asked).toEqual([
      'POST /stations/1/comparisons',
      'GET /stations/1/jobs/5',
      'GET /stations/1/jobs/5',
      'POST /stations/1/comparisons',
    ]);
    store.leave();
  });

  it('say why they could not be made', async () => {
    const store = useComparisonStore();
    answerTo = (_method, path) =>
      path.includes('/jobs/')
        ? [200, { ...running, state: 'dead', progress: null, error: 'the disk is full' }]
        : [202, { pending: true, jobId: 5 }];
    await store.ask(1, question);
    expect(store.state).toBe('failed');
    expect(store.problem?.message).toBe('The units under these rules could not be made: the disk is full.');
  });

  it('can be stopped', async () => {
    const store = useComparisonStore();
    let state = 'running';
    answerTo = (method, path) => {
      if (path.endsWith('/cancel')) state = 'cancelled';
      if (path.includes('/jobs/')) return [200, { ...running, state, progress: null }];
      return method === 'POST' ? [202, { pending: true, jobId: 5 }] : [404, {}];
    };
    await store.ask(1, question);
    await store.cancel();
    expect(store.state).toBe('failed');
    expect(store.problem?.message).toContain('was stopped');
  });
});

describe('trials', () => {
  const trial = (id: number, updatedAt: string) => ({
    id,
    name: `Trial ${id}`,
    question,
    notes: '',
    createdBy: null,
    createdAt: updatedAt,
    updatedAt,
  });

  it('stand with the latest first, gain what is saved and lose what is put away', async () => {
    const store = useTrialsStore();
    answerTo = (method) =>
      method === 'GET'
        ? [200, { items: [trial(1, '2026-11-01T00:00:00Z'), trial(2, '2026-11-09T00:00:00Z')] }]
        : method === 'POST'
          ? [201, trial(3, '2026-11-20T00:00:00Z')]
          : [204, undefined];
    await store.load(1);
    expect(store.trials.map(({ id }) => id)).toEqual([2, 1]);
    await store.save(1, question, { name: 'Trial 3', notes: '' });
    expect(store.trials.map(({ id }) => id)).toEqual([3, 2, 1]);
    await store.archive(1, 2);
    expect(store.trials.map(({ id }) => id)).toEqual([3, 1]);
    expect(asked[2]).toBe('DELETE /stations/1/trials/2');
  });
});
