import { once } from 'node:events';
import { createServer } from 'node:http';
import type { AddressInfo } from 'node:net';
import type { DataSource } from 'typeorm';
import { signIn } from '../../shared/contracts/auth.ts';
import type { BodyInput, Endpoint, QueryInput } from '../../shared/contracts/endpoint.ts';
import type { Role } from '../../shared/contracts/permission.ts';
import { createApp } from '../../server/app.ts';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { Membership } from '../../server/database/entities/membership.ts';
import { User } from '../../server/database/entities/user.ts';
import { createRateLimits } from '../../server/middleware/rate-limit.ts';
import type { Config } from '../../server/platform/config.ts';
import type { Deps } from '../../server/platform/deps.ts';
import { startDemoMailbox } from '../../server/platform/demo-mailbox.ts';
import type { DemoMailbox } from '../../server/platform/demo-mailbox.ts';
import { createEventHub } from '../../server/platform/event-hub.ts';
import { createInlineWork } from '../../server/platform/heavy-work.ts';
import { createLogger } from '../../server/platform/logger.ts';
import { createMailer } from '../../server/platform/mailer.ts';
import { hashPassword } from '../../server/platform/password.ts';
import { apiRoutes } from '../../server/features/index.ts';
import type { Route } from '../../server/platform/route.ts';
import { createTestDatabase } from './database.ts';

export interface TestReply<T = unknown> {
  status: number;
  headers: Headers;
  body: T;
  text: string;
}

export interface CallOptions<E extends Endpoint> {
  params?: Record<string, string | number>;
  query?: QueryInput<E>;
  body?: BodyInput<E> | FormData;
  /** Access or API token. */
  token?: string;
  cookie?: string;
  headers?: Record<string, string>;
}

export interface TestApi {
  url: string;
  databaseUrl: string;
  dataSource: DataSource;
  mailbox: DemoMailbox;
  routes: Route[];
  deps: Deps;
  /** Real HTTP; the reply is parsed as JSON where it is JSON. */
  call<E extends Endpoint>(endpoint: E, options?: CallOptions<E>): Promise<TestReply>;
  /** Adds a person with a role at a station; gives an access token. */
  addPerson(
    stationId: number,
    role: Role,
    email?: string,
  ): Promise<{ token: string; userId: string; email: string }>;
  signIn(email: string): Promise<string>;
  close(): Promise<void>;
}

export const testPassword = 'a password for tests';
let passwordHash: Promise<string> | null = null;

/** Real HTTP to a server of the API; the reply is parsed as JSON where it is JSON. */
export async function callApi<E extends Endpoint>(
  url: string,
  endpoint: E,
  options: CallOptions<E> = {},
): Promise<TestReply> {
  const path = endpoint.path.replace(/:(\w+)/g, (_all, name: string) =>
    encodeURIComponent(String(options.params?.[name] ?? `:${name}`)),
  );
  const search = new URLSearchParams();
  for (const [key, value] of Object.entries(options.query ?? {})) {
    if (value !== undefined) search.set(key, String(value));
  }
  const isForm = options.body instanceof FormData;
  const response = await fetch(`${url}/api${path}${search.size > 0 ? `?${search}` : ''}`, {
    method: endpoint.method,
    headers: {
      ...(options.token ? { authorization: `Bearer ${options.token}` } : {}),
      ...(options.cookie ? { cookie: options.cookie } : {}),
      ...(options.body !== undefined && !isForm ? { 'content-type': 'application/json' } : {}),
      ...options.headers,
    },
    body:
      options.body === undefined
        ? undefined
        : isForm
          ? (options.body as FormData)
          : JSON.stringify(options.body),
  });
  const text = await response.text();
  const isJson = /json/.test(response.headers.get('content-type') ?? '');
  return {
    status: response.status,
    headers: response.headers,
    text,
    body: isJson ? JSON.parse(text) : undefined,
  };
}

/** One server process more over the same database and the like; `startTestApi` starts the first. */
export async function startServer(deps: Deps): Promise<{ url: string; stop: () => Promise<void> }> {
  const server = createServer(createApp(deps));
  server.listen(0, '127.0.0.1');
  await once(server, 'listening');
  return {
    url: `http://127.0.0.1:${(server.address() as AddressInfo).port}`,
    async stop() {
      const closed = new Promise((resolve) => server.close(resolve));
      server.closeAllConnections();
      await closed;
    },
  };
}

/** The whole API on a free loopback port over a database of its own; only e-mail is a local fake. */
export async function startTestApi(config: Partial<Config> = {}): Promise<TestApi> {
  const database = await createTestDatabase();
  const dataSource = await connectDataSource(createDataSource({ url: database.url, poolSize: 10 }));
  const logger = createLogger('test', process.env.TEST_LOG_LEVEL ?? 'silent');
  const mailbox = await startDemoMailbox();
  const mailer = createMailer({ url: mailbox.url, from: 'Whichwire <test@localhost>', logger });
  const eventHub = createEventHub({ url: database.url, logger });
  await eventHub.start();
  const deps: Deps = {
    config: {
      databaseUrl: database.url,
      databasePool: 10,
      host: '127.0.0.1',
      port: 0,
      publicUrl: 'http://127.0.0.1',
      jwtSecret: 'only for tests, thirty-two characters long',
      demo: false,
      mailUrl: mailbox.url,
      mailFrom: 'Whichwire <test@localhost>',
      trustProxy: 1,
      metricsToken: '',
      logLevel: 'silent',
      clientFolder: '',
      setUpToken: '',
      ...config,
    },
    logger,
    dataSource,
    mailer,
    demoMailbox: mailbox,
    eventHub,
    rateLimits: createRateLimits(dataSource),
    heavyWork: createInlineWork(),
    now: Date.now,
  };
  const { url, stop } = await startServer(deps);
  let people = 0;

  const api: TestApi = {
    url,
    databaseUrl: database.url,
    dataSource,
    mailbox,
    deps,
    routes: apiRoutes(deps),

    call: (endpoint, options) => callApi(url, endpoint, options),

    async addPerson(stationId, role, email) {
      people += 1;
      const address = email ?? `${role}${people}@station${stationId}.example`;
      passwordHash ??= hashPassword(testPassword);
      const user = await dataSource
        .getRepository(User)
        .save({ email: address, name: `${role} ${people}`, passwordHash: await passwordHash });
      await dataSource.getRepository(Membership).save({ stationId, userId: user.id, role });
      return { token: await api.signIn(address), userId: user.id, email: address };
    },

    async signIn(email) {
      people += 1;
      const reply = await api.call(signIn, {
        body: { email, password: testPassword },
        // Each test person comes from an address of their own: the rate limits are tested where they are meant.
        headers: { 'x-forwarded-for': `10.0.${people >> 8}.${people & 255}` },
      });
      if (reply.status !== 200) throw new Error(`Sign-in of ${email} failed: ${reply.text}`);
      return (reply.body as { accessToken: string }).accessToken;
    },

    async close() {
      await stop();
      await eventHub.stop();
      await mailer.drain();
      await mailbox.close();
      await dataSource.destroy();
      await database.drop();
    },
  };
  return api;
}
