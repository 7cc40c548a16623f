import { createServer, type AddressInfo, type Socket } from 'node:net';
import { createRandom, type Random } from '../../shared/stats/random.ts';

/**
 * A TCP line server that stands in for the public spot network: it asks for a call sign, waits for an
 * answer, then sends lines. The faults are those that real feeds show; tests switch them on.
 */
export interface LineServerFaults {
  /** Close the connection after this many lines on it. */
  dropAfterLines?: number;
  /** Fall silent after this many lines on a connection without closing it. */
  halfOpenAfterLines?: number;
  /** After every so many lines send one of rubbish. */
  garbageEveryLines?: number;
  /** Cut the stream into writes at arbitrary bytes. */
  splitWrites?: boolean;
  /** On every log-in first send again up to this many of the latest lines. */
  replayLines?: number;
}

export interface LineServerOptions extends LineServerFaults {
  /** 0 picks a free port. */
  port: number;
  /** 127.0.0.1 unless given. */
  host?: string;
  /** Seeds rubbish and cuts. */
  seed?: number;
}

export interface LineServer {
  port: number;
  /** Sends a line to every client that is logged in; returns how many got it. */
  send(line: string): number;
  /** Sends lines at a steady rate and resolves when the last has been handed over. */
  burst(lines: Iterable<string>, linesPerSecond: number): Promise<void>;
  /** Changes faults from now on; a fault set to undefined ends. */
  setFaults(faults: LineServerFaults): void;
  /** Cuts all connections without a goodbye, as a lost network does. */
  dropAll(): void;
  /** Clients that are logged in and served. */
  clientCount(): number;
  /** The call signs that logged in so far, in order. */
  logins(): readonly string[];
  /** Resolves when `count` log-ins have happened since the start. */
  waitForLogins(count: number): Promise<void>;
  /** Resolves when no client is logged in. */
  waitForNoClients(): Promise<void>;
  close(): Promise<void>;
}

interface Client {
  socket: Socket;
  typed: string;
  loggedIn: boolean;
  sentLines: number;
  silent: boolean;
}

/** Without a line end, as prompts have none: who waits for a whole line before answering waits for ever. */
const prompt = 'Which station is calling? ';
const longestLogin = 200;
const longestReplay = 100_000;
/** A client that reads slower than this backlog is cut, as a public server would: memory is bounded. */
const longestBacklogBytes = 64 * 1024 * 1024;
const burstTickMs = 10;

const rubbish = [
  'To all: the feed pauses at noon for a quarter of an hour',
  'DX de EI7QSA-#:  ----.-  EA8QSH       CW    21 dB  22 WPM  CQ      1812Z',
  'DX de EI7QSC-#:  1824.5',
  'DX de',
  '\u0007\u0007',
  '\u0000\u0001\u0002\ufffd',
  '%%%%%%%%%%%%%%%%%%%%%%%%%%%%%%%%',
  'DX de EI7QSA-#:  7012.3  EA8QSH       CW    21 dB  22 WPM  CQ      9999Z',
];

/** Cuts a buffer at arbitrary bytes. */
function cut(random: Random, bytes: Buffer): Buffer[] {
  const pieces: Buffer[] = [];
  for (let from = 0; from < bytes.length;) {
    const to = Math.min(bytes.length, from + 1 + random.integer(Math.max(1, bytes.length - 1)));
    pieces.push(bytes.subarray(from, to));
    from = to;
  }
  return pieces;
}

/**
 * Starts the server.
 *
 * @throws the listen error (such as EADDRINUSE) when the port is taken
 */
export async function startLineServer(options: LineServerOptions): Promise<LineServer> {
  const { port, host = '127.0.0.1', seed = 1 } = options;
  let faults: LineServerFaults = { ...options };
  const random = createRandom(seed).fork('line server');
  const clients = new Set<Client>();
  const history: string[] = [];
  const loginCalls: string[] = [];
  const watchers = new Set<() => void>();
  const notify = (): void => {
    for (const look of watchers) look();
  };
  const until = (reached: () => boolean): Promise<void> =>
    new Promise((resolve) => {
      const look = (): void => {
        if (!reached()) return;
        watchers.delete(look);
        resolve();
      };
      watchers.add(look);
      look();
    });

  const write = (client: Client, line: string): void => {
    const bytes = Buffer.from(`${line}\r\n`, 'utf8');
    for (const piece of faults.splitWrites ? cut(random, bytes) : [bytes]) client.socket.write(piece);
    if (client.socket.writableLength > longestBacklogBytes) client.socket.destroy();
  };

  /** Sends one spot line with the faults that are due; false when this client no longer gets any. */
  const deliver = (client: Client, line: string): boolean => {
    if (client.silent || client.socket.destroyed) return false;
    write(client, line);
    client.sentLines++;
    const { garbageEveryLines, halfOpenAfterLines, dropAfterLines } = faults;
    if (garbageEveryLines !== undefined && client.sentLines % garbageEveryLines === 0) {
      write(client, random.pick(rubbish));
    }
    if (halfOpenAfterLines !== undefined && client.sentLines >= halfOpenAfterLines) client.silent = true;
    if (dropAfterLines !== undefined && client.sentLines >= dropAfterLines) {
      client.loggedIn = false;
      client.socket.end();
    }
    return true;
  };

  const logIn = (client: Client, call: string): void => {
    client.socket.write(`\r\nWelcome ${call}. Spots follow, one a line, times in UTC.\r\n`);
    client.loggedIn = true;
    const replayed = faults.replayLines ?? 0;
    if (replayed > 0) for (const line of history.slice(-replayed)) deliver(client, line);
    loginCalls.push(call);
    notify();
  };

  const server = createServer((socket) => {
    const client: Client = { socket, typed: '', loggedIn: false, sentLines: 0, silent: false };
    clients.add(client);
    socket.setNoDelay(true);
    // Bytes, not text: a log-in is plain ASCII, and a broken character must not throw.
    socket.on('data', (bytes) => {
      if (client.loggedIn) return;
      client.typed += bytes.toString('latin1');
      const end = client.typed.search(/[\r\n]/);
      if (end === -1) {
        if (client.typed.length > longestLogin) socket.destroy();
        return;
      }
      const call = client.typed.slice(0, end).trim().toUpperCase();
      client.typed = client.typed.slice(end + 1);
      if (/^[A-Z0-9/-]{3,20}$/.test(call)) logIn(client, call);
      else if (call !== '') socket.write(`That is not a call sign.\r\n${prompt}`);
    });
    // A reset by the other side is an ordinary end here; without a listener it would end the process.
    socket.on('error', () => socket.destroy());
    socket.on('close', () => {
      clients.delete(client);
      notify();
    });
    socket.write(`Practice feed of the Corrib Low Band Group.\r\n${prompt}`);
  });

  await new Promise<void>((resolve, reject) => {
    server.once('error', reject);
    server.listen(port, host, () => {
      server.removeListener('error', reject);
      resolve();
    });
  });

  const served = (): Client[] => [...clients].filter((client) => client.loggedIn && !client.silent);
  const send = (line: string): number => {
    history.push(line);
    if (history.length > 2 * longestReplay) history.splice(0, history.length - longestReplay);
    return served().filter((client) => deliver(client, line)).length;
  };

  return {
    port: (server.address() as AddressInfo).port,
    send,
    burst: (lines, linesPerSecond) =>
      new Promise((resolve) => {
        const iterator = lines[Symbol.iterator]();
        const startedMs = performance.now();
        let sent = 0;
        const timer = setInterval(() => {
          const due = ((performance.now() - startedMs) / 1000) * linesPerSecond;
          for (; sent < due; sent++) {
            const { value, done } = iterator.next();
            if (done) {
              clearInterval(timer);
              resolve();
              return;
            }
            send(value);
          }
        }, burstTickMs);
      }),
    setFaults: (changed) => {
      faults = { ...faults, ...changed };
    },
    dropAll: () => {
      for (const client of clients) client.socket.resetAndDestroy();
    },
    clientCount: () => served().length,
    logins: () => loginCalls,
    waitForLogins: (count) => until(() => loginCalls.length >= count),
    waitForNoClients: () => until(() => ![...clients].some((client) => client.loggedIn)),
    close: () =>
      new Promise((resolve) => {
        server.close(() => resolve());
        for (const client of clients) client.socket.destroy();
      }),
  };
}
