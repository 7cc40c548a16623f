import { createServer } from 'node:http';
import type { Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { setApiBase } from '../api/url.ts';
import { openLadder } from '../../shared/contracts/ladder-url.ts';
import { fixtureLadder } from '../../shared/pictures/ladder-answer.fixture.ts';
import { useLadderStore } from './ladder.ts';

type Reply = [status: number, body: unknown];
let server: Server;
let answerTo: (path: string, body: { bandMetres?: number | null }) => Reply | Promise<Reply>;
let asked: string[];

beforeEach(async () => {
  asked = [];
  setActivePinia(createPinia());
  server = createServer((request, response) => {
    void (async () => {
      let text = '';
      for await (const chunk of request) text += String(chunk);
      const path = request.url!.replace('/api', '');
      // Access tokens are another test's subject: this server asks for none.
      if (!path.startsWith('/stations/')) return void response.writeHead(401).end();
      asked.push(`${request.method} ${path}`);
      const [status, reply] = await answerTo(path, JSON.parse(text === '' ? '{}' : text));
      const type = status >= 400 ? 'application/problem+json' : 'application/json';
      response.writeHead(status, { 'content-type': type }).end(JSON.stringify(reply));
    })();
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  setApiBase(`http://127.0.0.1:${(server.address() as AddressInfo).port}/api`);
});

afterEach(async () => {
  setApiBase('/api');
  server.closeAllConnections();
  await new Promise((resolve) => server.close(resolve));
});

const running = {
  ...{ id: 5, kind: 'units', state: 'running', attempts: 1, error: null },
  ...{
    createdAt: '2026-11-20T10:00:00Z',
    finishedAt: null,
    progress: { done: 1, total: 9, secondsLeft: 30 },
  },
};

describe('asking for a ladder', () => {
  it('sends the question as it stands in the address and keeps the answer, every part of it', async () => {
    const store = useLadderStore();
    answerTo = (_path, body) => {
      expect(body).toEqual({ ...openLadder, bandMetres: 80, referenceAntennaId: 2 });
      return [200, fixtureLadder()];
    };
    await store.ask(1, { ...openLadder, bandMetres: 80, referenceAntennaId: 2 });
    expect(asked).toEqual(['POST /stations/1/ladder']);
    expect([store.state, store.answer]).toEqual(['ready', fixtureLadder()]);
  });

  it('drops the ladder of the band that was left before it came', async () => {
    const store = useLadderStore();
    let release: () => void = () => undefined;
    const held = new Promise<void>((resolve) => (release = resolve));
    answerTo = async (_path, { bandMetres }) => {
      if (bandMetres === 80) await held;
      return [200, fixtureLadder({ bandMetres: bandMetres ?? null })];
    };
    const older = store.ask(1, { ...openLadder, bandMetres: 80 });
    await vi.waitFor(() => expect(asked).toHaveLength(1));
    await store.ask(1, { ...openLadder, bandMetres: 160 });
    release();
    await older;
    expect(store.answer?.bandMetres).toBe(160);
  });

  it('waits for units under other rules, and asks again when they are made', async () => {
    const store = useLadderStore();
    let state = 'running';
    answerTo = (path) => {
      if (path.includes('/jobs/')) return [200, { ...running, state }];
      return state === 'done' ? [200, fixtureLadder()] : [202, { pending: true, jobId: 5 }];
    };
    await store.ask(1, openLadder);
    expect([store.state, store.jobId, store.job?.progress?.total]).toEqual(['loading', 5, 9]);
    state = 'done';
    await store.follow();
    expect([store.state, store.jobId, store.answer?.counts.units]).toEqual(['ready', null, 904]);
    store.leave();
  });

  it('says what went wrong and keeps the ladder that stood', async () => {
    const store = useLadderStore();
    answerTo = () => [200, fixtureLadder()];
    await store.ask(1, openLadder);
    answerTo = () => [
      422,
      { type: 'about:blank', title: 'No', status: 422, code: 'invalid', detail: 'There is no such antenna.' },
    ];
    await store.ask(1, { ...openLadder, referenceAntennaId: 99 });
    expect([store.state, store.problem?.message]).toEqual(['failed', 'There is no such antenna.']);
    expect(store.answer?.counts.units).toBe(904);
  });
});
