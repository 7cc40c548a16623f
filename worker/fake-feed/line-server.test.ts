import { connect, type Socket } from 'node:net';
import { afterEach, describe, expect, it } from 'vitest';
import { startLineServer, type LineServer, type LineServerOptions } from './line-server.ts';

/** A client that keeps every byte and lets a test wait for what it wants to see. */
class Client {
  bytes = Buffer.alloc(0);
  chunks = 0;
  closed = false;
  private waiters: (() => void)[] = [];

  constructor(readonly socket: Socket) {
    socket.on('data', (chunk) => {
      this.bytes = Buffer.concat([this.bytes, chunk]);
      this.chunks++;
      this.wake();
    });
    // A reset is one of the faults under test.
    socket.on('error', () => undefined);
    socket.on('close', () => {
      this.closed = true;
      this.wake();
    });
  }

  private wake(): void {
    for (const waiter of this.waiters.splice(0)) waiter();
  }

  async until(reached: (client: Client) => boolean): Promise<this> {
    while (!reached(this)) await new Promise<void>((resolve) => this.waiters.push(resolve));
    return this;
  }

  text(): string {
    return this.bytes.toString('utf8');
  }

  /** Lines after the welcome. */
  lines(): string[] {
    const [, rest = ''] = this.text().split('times in UTC.\r\n');
    return rest.split('\r\n').slice(0, -1);
  }
}

const servers: LineServer[] = [];
const clients: Client[] = [];

afterEach(async () => {
  for (const client of clients.splice(0)) client.socket.destroy();
  for (const server of servers.splice(0)) await server.close();
});

async function serve(options: Partial<LineServerOptions> = {}): Promise<LineServer> {
  const server = await startLineServer({ port: 0, ...options });
  servers.push(server);
  return server;
}

async function dial(server: LineServer): Promise<Client> {
  const client = new Client(connect(server.port, '127.0.0.1'));
  clients.push(client);
  return client.until((c) => c.text().includes('calling?'));
}

async function logIn(server: LineServer, call = 'EI7QSB'): Promise<Client> {
  const client = await dial(server);
  client.socket.write(`${call}\r\n`);
  return client.until((c) => c.text().includes('times in UTC.\r\n'));
}

const numbered = (from: number, to: number): string[] =>
  Array.from({ length: to - from + 1 }, (_, i) => `line ${from + i}`);

describe('the line server', () => {
  it('asks for a call sign, sends nothing before it, and lines in order after it', async () => {
    const server = await serve();
    const early = await dial(server);
    expect(server.send('before')).toBe(0);
    early.socket.write('EI7');
    early.socket.write('QSB\r\n');
    await server.waitForLogins(1);
    for (const line of numbered(1, 500)) expect(server.send(line)).toBe(1);
    await early.until((c) => c.lines().length === 500);
    expect(early.lines()).toEqual(numbered(1, 500));
    expect(server.logins()).toEqual(['EI7QSB']);
  });

  it('asks again when the answer is no call sign', async () => {
    const server = await serve();
    const client = await dial(server);
    client.socket.write('hello there!\n');
    await client.until((c) => c.text().includes('not a call sign'));
    client.socket.write('ei7qsb\n');
    await client.until((c) => c.text().includes('Welcome EI7QSB'));
    expect(server.clientCount()).toBe(1);
  });

  it('cuts a client that types without end', async () => {
    const server = await serve();
    const client = await dial(server);
    client.socket.write('X'.repeat(5_000));
    await client.until((c) => c.closed);
    expect(server.clientCount()).toBe(0);
  });

  it('serves several clients the same lines', async () => {
    const server = await serve();
    const [one, two] = await Promise.all([logIn(server, 'EI7QSB'), logIn(server, 'EI7QTT')]);
    await server.waitForLogins(2);
    for (const line of numbered(1, 20)) server.send(line);
    for (const client of [one, two]) {
      await client.until((c) => c.lines().length === 20);
      expect(client.lines()).toEqual(numbered(1, 20));
    }
  });

  it('drops the connection after the set number of lines and serves the next one', async () => {
    const server = await serve({ dropAfterLines: 7 });
    const client = await logIn(server);
    for (const line of numbered(1, 10)) server.send(line);
    await client.until((c) => c.closed);
    expect(client.lines()).toEqual(numbered(1, 7));
    await server.waitForNoClients();
    server.setFaults({ dropAfterLines: undefined });
    const again = await logIn(server);
    for (const line of numbered(11, 30)) server.send(line);
    await again.until((c) => c.lines().length === 20);
    expect(again.lines()).toEqual(numbered(11, 30));
  });

  it('goes half-open: silent, but not closed', async () => {
    const server = await serve({ halfOpenAfterLines: 3 });
    const client = await logIn(server);
    expect(numbered(1, 6).map((line) => server.send(line))).toEqual([1, 1, 1, 0, 0, 0]);
    // A second client proves that everything sent before has gone out by the time it is served.
    server.setFaults({ halfOpenAfterLines: undefined });
    const other = await logIn(server);
    server.send('last');
    await other.until((c) => c.lines().includes('last'));
    expect(client.lines()).toEqual(numbered(1, 3));
    expect(client.closed).toBe(false);
  });

  it('sends the latest lines again after a log-in when told to', async () => {
    const server = await serve({ replayLines: 5 });
    for (const line of numbered(1, 12)) server.send(line);
    const client = await logIn(server);
    server.send('line 13');
    await client.until((c) => c.lines().includes('line 13'));
    expect(client.lines()).toEqual(numbered(8, 13));
  });

  it('mixes rubbish between whole lines', async () => {
    const server = await serve({ garbageEveryLines: 4 });
    const client = await logIn(server);
    for (const line of numbered(1, 40)) server.send(line);
    await client.until((c) => c.lines().length === 50);
    const good = client.lines().filter((line) => /^line \d+$/.test(line));
    expect(good).toEqual(numbered(1, 40));
    expect(client.lines()[4]).not.toMatch(/^line \d+$/);
  });

  it('loses no byte when it splits its writes anywhere, inside characters too', async () => {
    const server = await serve({ splitWrites: true, seed: 5 });
    const client = await logIn(server);
    const lines = numbered(1, 300).map((line) => `${line} é − ∑`);
    for (const line of lines) server.send(line);
    await client.until((c) => c.lines().length === 300);
    expect(client.lines()).toEqual(lines);
  });

  it('cuts all connections at once without a goodbye', async () => {
    const server = await serve();
    const [one, two] = await Promise.all([logIn(server), logIn(server)]);
    server.dropAll();
    await Promise.all([one.until((c) => c.closed), two.until((c) => c.closed)]);
    await server.waitForNoClients();
    expect(server.clientCount()).toBe(0);
  });

  it('hands over every line of a burst in order', async () => {
    const server = await serve();
    const client = await logIn(server);
    await server.burst(numbered(1, 3_000), 20_000);
    await client.until((c) => c.lines().length === 3_000);
    expect(client.lines()).toEqual(numbered(1, 3_000));
  });

  it('refuses to start on a port that is taken', async () => {
    const server = await serve();
    await expect(startLineServer({ port: server.port })).rejects.toMatchObject({ code: 'EADDRINUSE' });
  });
});
