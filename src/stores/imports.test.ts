import { createServer } from 'node:http';
import type { IncomingMessage, Server, ServerResponse } from 'node:http';
import type { AddressInfo } from 'node:net';
import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import type { SpotMapping } from '../../shared/contracts/import.ts';
import { signedInFixture } from '../../tests/helpers/client-server.ts';
import { dropAccess, takeAccess } from '../api/access.ts';
import { setApiBase } from '../api/url.ts';
import { recordFixture } from '../components/imports/record.fixture.ts';
import { useImportsStore } from './imports.ts';

let server: Server;
let seen: string[];
let answer: (incoming: IncomingMessage, body: string, response: ServerResponse) => void;

const json = (response: ServerResponse, status: number, body: unknown) =>
  response
    .writeHead(status, { 'content-type': status < 400 ? 'application/json' : 'application/problem+json' })
    .end(JSON.stringify(body));
const refusal = (detail: string, errors: { path: string; message: string }[] = []) => ({
  type: 'about:blank',
  title: 'Refused',
  status: 400,
  code: 'invalid',
  detail,
  errors,
});

beforeEach(async () => {
  seen = [];
  server = createServer(async (incoming, response) => {
    let body = '';
    for await (const chunk of incoming) body += chunk;
    seen.push(`${incoming.method} ${incoming.url?.replace('/api/stations/1', '')}`);
    answer(incoming, body, response);
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  const origin = `http://127.0.0.1:${(server.address() as AddressInfo).port}`;
  window.location.href = `${origin}/`;
  setApiBase(`${origin}/api`);
  takeAccess(signedInFixture());
  localStorage.clear();
  setActivePinia(createPinia());
});
afterEach(async () => {
  dropAccess();
  server.closeAllConnections();
  await new Promise((resolve) => server.close(resolve));
});

const mapping: SpotMapping = {
  kind: 'spots',
  layout: 'spot lines',
  format: {
    encoding: 'utf-8',
    delimiter: ',',
    quote: '"',
    hasHeader: true,
    skipLines: 0,
    decimalComma: false,
  },
  time: { kind: 'iso', zone: 'UTC' },
  columns: {},
  freqUnit: 'kHz',
  receiverNames: {},
  otherReceivers: 'refuse',
  firstDay: '2026-11-30',
  timeKnownTo: 'minute',
};

describe('the list of imports', () => {
  it('reads on where a page ends, and keeps its end when the first page comes anew', async () => {
    const store = useImportsStore();
    answer = (incoming, _body, response) => {
      const after = new URL(incoming.url!, 'http://x').searchParams.get('after');
      if (after === null)
        json(response, 200, { items: [9, 8].map((id) => recordFixture({ id })), next: '8' });
      else json(response, 200, { items: [recordFixture({ id: 3 })], next: null });
    };
    await store.load(1);
    expect([store.items.map(({ id }) => id), store.next]).toEqual([[9, 8], '8']);
    await store.more();
    expect([store.items.map(({ id }) => id), store.next]).toEqual([[9, 8, 3], null]);
    await store.load(1);
    expect([store.items.map(({ id }) => id), store.next]).toEqual([[9, 8, 3], null]);
  });

  it('does not take a single import that was read below its end for the next in line', async () => {
    const store = useImportsStore();
    answer = (incoming, _body, response) =>
      incoming.url!.includes('/imports/2')
        ? json(response, 200, recordFixture({ id: 2 }))
        : json(response, 200, { items: [recordFixture({ id: 9 })], next: '9' });
    await store.read(1, 2);
    await store.load(1);
    expect(store.items.map(({ id }) => id)).toEqual([9]);
    expect(store.records.get(2)?.id).toBe(2);
  });

  it('says why it could not be read, and keeps what it had', async () => {
    const store = useImportsStore();
    answer = (_incoming, _body, response) =>
      json(response, 200, { items: [recordFixture({ state: 'running' })], next: null });
    await store.load(1);
    expect(store.isAnyAtWork).toBe(true);
    answer = (_incoming, _body, response) => json(response, 400, refusal('Not now.'));
    await store.load(1);
    expect([store.state, store.problem?.message, store.items.length]).toEqual(['failed', 'Not now.', 1]);
  });

  it('shows nothing of one station under the name of another', async () => {
    const store = useImportsStore();
    answer = (_incoming, _body, response) => json(response, 200, { items: [recordFixture()], next: null });
    await store.load(1);
    answer = (_incoming, _body, response) => json(response, 200, { items: [], next: null });
    const loading = store.load(2);
    expect(store.items).toEqual([]);
    await loading;
  });
});

describe('files on their way', () => {
  const file = (name: string) => new File(['some lines'], name);

  it('go one after the other, and each becomes an import', async () => {
    const store = useImportsStore();
    let held: (() => void) | null = null;
    answer = (_incoming, body, response) => {
      const fileName = /filename="([^"]+)"/.exec(body)![1]!;
      const reply = () =>
        json(response, 201, recordFixture({ id: fileName === 'one.csv' ? 1 : 2, fileName }));
      if (fileName === 'one.csv') held = reply;
      else reply();
    };
    const first = store.send(1, 'spots', file('one.csv'));
    const second = store.send(1, 'dwells', file('two.csv'));
    await vi.waitFor(() => expect(held).not.toBeNull());
    expect(store.uploads.map((each) => each.state)).toEqual(['sending', 'waiting']);
    held!();
    expect([(await first)?.id, (await second)?.id]).toEqual([1, 2]);
    expect(store.uploads).toEqual([]);
    expect(seen).toEqual(['POST /imports?kind=spots', 'POST /imports?kind=dwells']);
  });

  it('stay with the reason when the server refuses them, can be sent again, and do not hold up the next', async () => {
    const store = useImportsStore();
    answer = (_incoming, body, response) =>
      body.includes('filename="sheet.zip"')
        ? json(
            response,
            400,
            refusal('The file cannot be taken.', [{ path: 'body.file', message: 'A ZIP archive.' }]),
          )
        : json(response, 201, recordFixture({ id: 2 }));
    const refused = store.send(1, 'spots', file('sheet.zip'));
    const taken = store.send(1, 'spots', file('two.csv'));
    expect([await refused, (await taken)?.id]).toEqual([null, 2]);
    expect(store.uploads.map(({ state, problem }) => [state, problem?.errors[0]?.message])).toEqual([
      ['failed', 'A ZIP archive.'],
    ]);
    answer = (_incoming, _body, response) => json(response, 201, recordFixture({ id: 3 }));
    expect((await store.sendAgain(store.uploads[0]!.key))?.id).toBe(3);
    expect(store.uploads).toEqual([]);
  });

  it('can be stopped half way without a word of complaint', async () => {
    const store = useImportsStore();
    let arrived = false;
    answer = () => (arrived = true);
    const sent = store.send(1, 'spots', file('one.csv'));
    await vi.waitFor(() => expect(arrived).toBe(true));
    store.stopUpload(store.uploads[0]!.key);
    expect(await sent).toBeNull();
    expect(store.uploads).toEqual([]);
  });
});

describe('a mapping that was worked on', () => {
  it('is there again in another tab, and gone once the import was started', async () => {
    const store = useImportsStore();
    store.keepDraft(1, 7, mapping);
    setActivePinia(createPinia());
    const other = useImportsStore();
    expect(other.draftOf(1, 7)).toEqual(mapping);
    expect(other.draftOf(2, 7)).toBeNull();
    let sent: unknown;
    answer = (_incoming, body, response) => {
      sent = JSON.parse(body);
      json(response, 202, recordFixture({ state: 'queued' }));
    };
    await other.start(1, 7, mapping);
    expect(sent).toEqual({ mapping });
    expect(other.draftOf(1, 7)).toBeNull();
  });

  it('stays when the server refuses the start', async () => {
    const store = useImportsStore();
    store.keepDraft(1, 7, mapping);
    const errors = [{ path: 'body.mapping.firstDay', message: 'Give the UTC day of the first line.' }];
    answer = (_incoming, _body, response) =>
      json(response, 400, refusal('The mapping does not fit the file.', errors));
    await expect(store.start(1, 7, mapping)).rejects.toMatchObject({ errors });
    expect(store.draftOf(1, 7)).toEqual(mapping);
  });

  it('of another release counts as none', () => {
    localStorage.setItem('whichwire.mapping.1.7', '{"kind":"tea leaves"}');
    expect(useImportsStore().draftOf(1, 7)).toBeNull();
  });
});

describe('work on an import', () => {
  it('is cancelled and undone, and the record follows the answer', async () => {
    const store = useImportsStore();
    answer = (incoming, _body, response) =>
      incoming.url!.endsWith('/cancel')
        ? json(response, 202, recordFixture({ state: 'cancelled' }))
        : json(response, 202, recordFixture({ state: 'done', jobId: 9 }));
    await store.read(1, 7);
    await store.cancel(1, 7);
    expect(store.records.get(7)?.state).toBe('cancelled');
    await store.undo(1, 7);
    expect(store.records.get(7)?.jobId).toBe(9);
    expect(seen.slice(1)).toEqual(['POST /imports/7/cancel', 'POST /imports/7/undo']);
  });
});
