import { createServer } from 'node:http';
import type { AddressInfo } from 'node:net';
import { setApiBase } from '../../src/api/url.ts';

/** What a test's server answers: a body for 200, or a status with a problem. */
export type Reply =
  | { status: number; detail?: string; code?: string; errors?: { path: string; message: string }[] }
  | { body: unknown };
export type Routes = Record<string, (body: unknown) => Reply>;

export interface LocalServer {
  /** "GET /me" and so on, in the order of arrival. */
  seen: string[];
  /** Routes may be exchanged while the test runs. */
  routes: Routes;
  stop: () => Promise<void>;
}

/** A real HTTP server for tests of what talks to the API; the client is pointed at it. */
export async function startLocalServer(routes: Routes): Promise<LocalServer> {
  const local: LocalServer = { seen: [], routes, stop: async () => undefined };
  const server = createServer(async (incoming, response) => {
    let text = '';
    for await (const chunk of incoming) text += chunk;
    const line = `${incoming.method} ${incoming.url?.replace(/^\/api/, '')}`;
    local.seen.push(line);
    const reply = local.routes[line]?.(text ? JSON.parse(text) : undefined) ?? { status: 404 };
    if ('body' in reply) {
      response.writeHead(200, { 'content-type': 'application/json' }).end(JSON.stringify(reply.body));
    } else if (reply.status === 204) {
      response.writeHead(204).end();
    } else {
      const problem = {
        type: 'about:blank',
        title: 'Refused',
        status: reply.status,
        code: reply.code ?? 'test',
        detail: reply.detail,
        errors: reply.errors,
      };
      response
        .writeHead(reply.status, { 'content-type': 'application/problem+json' })
        .end(JSON.stringify(problem));
    }
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  const origin = `http://127.0.0.1:${(server.address() as AddressInfo).port}`;
  // The browser's stand-in keeps to the same-origin rule: the page must come from the server it talks to.
  if (typeof window !== 'undefined') window.location.href = `${origin}/`;
  setApiBase(`${origin}/api`);
  local.stop = async () => {
    server.closeAllConnections();
    await new Promise((resolve) => server.close(resolve));
  };
  return local;
}

export const profileFixture = {
  id: '6f0c1f0e-7a55-4c1e-9b5e-2f0f6f3f2a11',
  email: 'analyst@example.org',
  name: 'Ann',
  lengthUnit: 'm' as const,
  theme: 'light' as const,
  createdAt: '2026-11-30T18:00:00Z',
  memberships: [
    { stationId: 1, stationName: 'Corrib Low Band Group', callSign: 'EI7QSB', role: 'analyst' as const },
    { stationId: 2, stationName: 'Second station', callSign: 'EI8QSB', role: 'contester' as const },
  ],
};

export const signedInFixture = () => ({
  accessToken: 'a-token-of-the-tests',
  expiresAt: new Date(Date.now() + 600_000).toISOString(),
  profile: profileFixture,
});
