import { createServer } from 'node:http';
import type { IncomingMessage, Server, ServerResponse } from 'node:http';
import type { AddressInfo } from 'node:net';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { z } from 'zod';
import { endpoint } from '../../shared/contracts/common.ts';
import { uploadImport } from '../../shared/contracts/import.ts';
import { dropAccess, takeAccess } from './access.ts';
import { upload } from './client.ts';
import { asProblem, isAbort } from './problem.ts';
import { setApiBase } from './url.ts';

const profile = {
  id: '6f0c1f0e-7a55-4c1e-9b5e-2f0f6f3f2a11',
  email: 'analyst@example.org',
  name: 'Ann',
  lengthUnit: 'm' as const,
  theme: 'dark' as const,
  createdAt: '2026-11-30T18:00:00Z',
  memberships: [],
};
const record = { id: 5 };
/** As the contract of imports is built, without its many columns, which change for reasons of their own. */
const uploadFile = endpoint({
  method: 'POST',
  path: uploadImport.path,
  summary: 'Upload a file',
  params: uploadImport.params,
  query: uploadImport.query,
  reply: z.object({ id: z.number() }),
  media: uploadImport.media,
});
const inTenMinutes = () => new Date(Date.now() + 600_000).toISOString();
const input = {
  params: { stationId: 1 },
  query: { kind: 'spots' as const },
  file: new File(['one\ntwo\nend'], 'night.txt', { type: 'text/plain' }),
};

let server: Server;
let seen: { line: string; authorization: string | undefined; body: string }[];
let answer: (incoming: IncomingMessage, response: ServerResponse) => void;

const json = (response: ServerResponse, status: number, body: unknown) =>
  response.writeHead(status, { 'content-type': 'application/json' }).end(JSON.stringify(body));

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
    answer(incoming, response);
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  const origin = `http://127.0.0.1:${(server.address() as AddressInfo).port}`;
  window.location.href = origin;
  setApiBase(`${origin}/api`);
  takeAccess({ accessToken: 'token', expiresAt: inTenMinutes(), profile });
});

afterEach(async () => {
  dropAccess();
  server.closeAllConnections();
  await new Promise((resolve) => server.close(resolve));
});

describe('an upload', () => {
  it('sends the file as the multipart field "file" and reads the reply', async () => {
    answer = (_, response) => json(response, 201, record);
    const reply = await upload(uploadFile, input);
    expect(reply.id).toBe(5);
    expect(seen[0]?.line).toBe('POST /api/stations/1/imports?kind=spots');
    expect(seen[0]?.authorization).toBe('Bearer token');
    expect(seen[0]?.body).toContain('name="file"; filename="night.txt"');
    expect(seen[0]?.body).toContain('one\ntwo\nend');
  });

  it('asks for a fresh token before it starts when the old one would run out on the way', async () => {
    takeAccess({ accessToken: 'old', expiresAt: new Date(Date.now() + 20_000).toISOString(), profile });
    answer = (incoming, response) =>
      incoming.url === '/api/auth/refresh'
        ? json(response, 200, { accessToken: 'new', expiresAt: inTenMinutes(), profile })
        : json(response, 201, record);
    await upload(uploadFile, input);
    expect(seen.map((each) => each.line)).toEqual([
      'POST /api/auth/refresh',
      'POST /api/stations/1/imports?kind=spots',
    ]);
    expect(seen[1]?.authorization).toBe('Bearer new');
  });

  it('fails with the sentence of the server', async () => {
    answer = (_, response) =>
      response.writeHead(413, { 'content-type': 'application/problem+json' }).end(
        JSON.stringify({
          type: 'x',
          title: 'Too large',
          status: 413,
          detail: 'At most 500 MB.',
          code: 'big',
        }),
      );
    const error = await upload(uploadFile, input).catch((reason: unknown) => asProblem(reason));
    expect(error).toMatchObject({ status: 413, message: 'At most 500 MB.' });
  });

  it('can be taken back before it starts', async () => {
    answer = (_, response) => json(response, 201, record);
    const error = await upload(uploadFile, { ...input, signal: AbortSignal.abort() }).catch(
      (reason: unknown) => reason,
    );
    expect(isAbort(error)).toBe(true);
    expect(seen).toEqual([]);
  });
});
