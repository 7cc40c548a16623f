// @vitest-environment node
import { createServer } from 'node:http';
import type { IncomingMessage, Server, ServerResponse } from 'node:http';
import type { AddressInfo } from 'node:net';
import { afterEach, beforeEach, describe, expect, expectTypeOf, it } from 'vitest';
import { z } from 'zod';
import { refresh, signIn, updateProfile } from '../../shared/contracts/auth.ts';
import { endpoint } from '../../shared/contracts/common.ts';
import { exportDwells, listDwells, listNowOn } from '../../shared/contracts/dwell.ts';
import { accessToken, dropAccess, onSignedOut, takeAccess } from './access.ts';
import { download, request } from './client.ts';
import type { RequestInput } from './client.ts';
import { ApiProblem, isAbort } from './problem.ts';
import { apiUrl, setApiBase } from './url.ts';

type Answer = (request: IncomingMessage, response: ServerResponse, body: string) => void;

const profile = {
  id: '6f0c1f0e-7a55-4c1e-9b5e-2f0f6f3f2a11',
  email: 'analyst@example.org',
  name: 'Ann',
  lengthUnit: 'm' as const,
  theme: 'dark' as const,
  createdAt: '2026-11-30T18:00:00Z',
  memberships: [],
};
const signedIn = (accessToken: string) => ({ accessToken, expiresAt: '2026-11-30T18:10:00Z', profile });
const params = { stationId: 1 };

let server: Server;
let seen: { line: string; authorization: string | undefined; body: string }[];
let answer: Answer;

function json(response: ServerResponse, status: number, body: unknown): void {
  const type = status < 400 ? 'application/json' : 'application/problem+json';
  response.writeHead(status, { 'content-type': type }).end(JSON.stringify(body));
}
const refused = { type: 'about:blank', title: 'Signed out', status: 401, code: 'token-expired' };
const failure = (promise: Promise<unknown>): Promise<ApiProblem> =>
  promise.then(
    () => Promise.reject(new Error('the request should have failed')),
    (error: unknown) => error as ApiProblem,
  );

beforeEach(async () => {
  seen = [];
  server = createServer(async (incoming, response) => {
    let body = '';
    for await (const chunk of incoming) body += chunk;
    seen.push({
      line: `${incoming.method} ${incoming.url}`,
      authorization: incoming.headers.authorization,
      body,
    });
    answer(incoming, response, body);
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  setApiBase(`http://127.0.0.1:${(server.address() as AddressInfo).port}/api`);
});

afterEach(async () => {
  dropAccess();
  server.closeAllConnections();
  await new Promise((resolve) => server.close(resolve));
});

describe('a request', () => {
  it('builds its address from the path, its parameters and its query, leaving out what is not given', async () => {
    answer = (_, response) => json(response, 200, { items: [], truncated: false });
    await request(listDwells, {
      params: { stationId: 7 },
      query: { from: '2026-11-30T18:00:00Z', to: '2026-12-01T06:00:00Z', receiverId: undefined },
    });
    expect(seen[0]?.line).toBe(
      'GET /api/stations/7/dwells?from=2026-11-30T18%3A00%3A00Z&to=2026-12-01T06%3A00%3A00Z',
    );
  });

  it('escapes what stands in the path', async () => {
    const named = endpoint({
      method: 'GET',
      path: '/things/:name',
      summary: '',
      params: z.object({ name: z.string() }),
      reply: z.object({}),
    });
    answer = (_, response) => json(response, 200, {});
    await request(named, { params: { name: 'a/b?c' } });
    expect(seen[0]?.line).toBe('GET /api/things/a%2Fb%3Fc');
  });

  it('sends its body as JSON and the token in the header', async () => {
    takeAccess(signedIn('first-token'));
    answer = (_, response) => json(response, 200, profile);
    await request(updateProfile, { body: { name: 'Ann' } });
    expect(seen[0]).toEqual({
      line: 'PATCH /api/me',
      authorization: 'Bearer first-token',
      body: '{"name":"Ann"}',
    });
  });

  it('refuses a reply that is not what the contract says, naming the field', async () => {
    answer = (_, response) => json(response, 200, { items: [{ receiverId: 'one', dwell: null }] });
    const problem = await failure(request(listNowOn, { params }));
    expect(problem.code).toBe('contract');
    expect(problem.message).toContain('items.0.receiverId');
  });

  it('knows at compile time what it needs: ids are numbers, optional query stays optional', () => {
    expectTypeOf<RequestInput<typeof listNowOn>>().toMatchObjectType<{ params: { stationId: number } }>();
    expectTypeOf<RequestInput<typeof listDwells>['query']>().toMatchObjectType<{
      from: string;
      receiverId?: number | undefined;
    }>();
    expectTypeOf(request<typeof refresh>).toBeCallableWith(refresh);
  });
});

describe('a request that fails', () => {
  it('turns a problem of the server into its sentence and its field errors', async () => {
    answer = (_, response) =>
      json(response, 422, {
        type: 'about:blank',
        title: 'Not accepted',
        status: 422,
        detail: 'Two fields need a change.',
        code: 'validation',
        errors: [
          { path: 'email', message: 'Give an e-mail address such as name@example.org.' },
          { path: 'email', message: 'A second sentence.' },
        ],
        requestId: 'r-1',
      });
    const problem = await failure(request(signIn, { body: { email: 'x', password: 'y' } }));
    expect(problem).toBeInstanceOf(ApiProblem);
    expect(problem).toMatchObject({
      message: 'Two fields need a change.',
      status: 422,
      code: 'validation',
      requestId: 'r-1',
    });
    expect(problem.fieldErrors).toEqual({ email: 'Give an e-mail address such as name@example.org.' });
  });

  it('says something useful about an answer that a proxy made', async () => {
    answer = (_, response) =>
      response.writeHead(502, { 'content-type': 'text/html' }).end('<h1>Bad gateway</h1>');
    const problem = await failure(request(listNowOn, { params }));
    expect(problem.message).toBe('The server is restarting. Try again in a moment.');
  });

  it('says that no answer came when the connection breaks', async () => {
    answer = (incoming) => incoming.socket.destroy();
    const problem = await failure(request(listNowOn, { params }));
    expect(problem).toMatchObject({
      status: 0,
      code: 'network',
      message: 'The server did not answer. Check the connection and try again.',
    });
  });

  it('is told apart from one that its caller took back', async () => {
    const taking = new AbortController();
    answer = () => taking.abort();
    const error = await failure(request(listNowOn, { params, signal: taking.signal }));
    expect(isAbort(error)).toBe(true);
  });
});

describe('an expired token', () => {
  it('is refreshed once for several requests at a time, and each of them is repeated', async () => {
    takeAccess(signedIn('old-token'));
    answer = (incoming, response) => {
      if (incoming.url === '/api/auth/refresh') json(response, 200, signedIn('new-token'));
      else if (incoming.headers.authorization === 'Bearer new-token') json(response, 200, { items: [] });
      else json(response, 401, refused);
    };
    const replies = await Promise.all([1, 2, 3, 4].map(() => request(listNowOn, { params })));
    expect(replies).toEqual([1, 2, 3, 4].map(() => ({ items: [] })));
    expect(seen.filter((each) => each.line === 'POST /api/auth/refresh')).toHaveLength(1);
    expect(accessToken()).toBe('new-token');
  });

  it('ends the session when the refresh is refused as well, and says so once', async () => {
    takeAccess(signedIn('old-token'));
    let ended = 0;
    const stop = onSignedOut(() => (ended += 1));
    answer = (_, response) => json(response, 401, refused);
    const problems = await Promise.all([1, 2].map(() => failure(request(listNowOn, { params }))));
    stop();
    expect(problems.map((problem) => problem.status)).toEqual([401, 401]);
    expect(ended).toBe(1);
    expect(accessToken()).toBeNull();
  });

  it('keeps the session when the server restarts during the refresh', async () => {
    takeAccess(signedIn('old-token'));
    answer = (incoming, response) =>
      incoming.url === '/api/auth/refresh' ? response.writeHead(503).end() : json(response, 401, refused);
    const problem = await failure(request(listNowOn, { params }));
    expect(problem.status).toBe(503);
    expect(accessToken()).toBe('old-token');
  });

  it('is not looked for behind a wrong password', async () => {
    takeAccess(signedIn('old-token'));
    answer = (_, response) =>
      json(response, 401, { ...refused, code: 'wrong-password', detail: 'Wrong password.' });
    const problem = await failure(request(signIn, { body: { email: 'a@example.org', password: 'no' } }));
    expect(problem.message).toBe('Wrong password.');
    expect(seen.map((each) => [each.line, each.authorization])).toEqual([
      ['POST /api/auth/sign-in', undefined],
    ]);
  });
});

describe('a download', () => {
  it('keeps the bytes and takes the name that the server gives', async () => {
    answer = (_, response) =>
      response
        .writeHead(200, {
          'content-type': 'text/csv',
          'content-disposition': `attachment; filename="log.csv"; filename*=UTF-8''switch%20log.csv`,
        })
        .end('receiver,antenna\r\n');
    const { blob, fileName } = await download(exportDwells, { params });
    expect([await blob.text(), fileName]).toEqual(['receiver,antenna\r\n', 'switch log.csv']);
  });

  it('fails with the sentence of the server, not with a file that holds the error', async () => {
    answer = (_, response) => json(response, 403, { ...refused, status: 403, detail: 'Not your station.' });
    expect((await failure(download(exportDwells, { params }))).message).toBe('Not your station.');
  });
});

it('refuses to build an address whose parameter is missing', () => {
  expect(() => apiUrl(listNowOn.path, {})).toThrow('/stations/:stationId/now-on needs stationId');
});
