import { connect, type Socket } from 'node:net';
import { createLineSplitter, type SplitLine } from './line-splitter.ts';

export type ConnectionState = 'connecting' | 'connected' | 'lost';

export interface FeedConnectionOptions {
  host: string;
  port: number;
  /** Sent when the feed asks who is calling. */
  loginCall: string;
  /** Returns true for a line that shows that the feed really serves us: then the next pause is short again. */
  onLine: (line: SplitLine, arrivedAtMs: number) => boolean;
  onState: (state: ConnectionState, error: string | null) => void;
  connectTimeoutMs?: number;
  /** The feed is left when it has sent nothing for this long: its connection may be half-open. */
  idleTimeoutMs?: number;
  /** An empty line is sent when the feed has been quiet for this long, so that nobody on the way forgets us. */
  keepaliveMs?: number;
  /** A feed that says nothing at first may still wait for a log-in. */
  loginAfterMs?: number;
  /** The pause before a new connection, doubled up to `longestRetryMs`; half of it by chance. */
  retryMs?: number;
  longestRetryMs?: number;
}

export interface FeedConnection {
  start(): void;
  /** Stops reading: the network's own buffers fill up and the feed slows down or keeps its lines. */
  pause(): void;
  resume(): void;
  /** Ends the connection for good. */
  stop(): void;
}

/** Keeps one feed connected until it is stopped. Knows sockets and bytes, nothing of spots. */
export function createFeedConnection(options: FeedConnectionOptions): FeedConnection {
  const { host, port, loginCall, onLine, onState } = options;
  const { connectTimeoutMs = 10_000, idleTimeoutMs = 300_000, keepaliveMs = 60_000 } = options;
  const { loginAfterMs = 3_000, retryMs = 1_000, longestRetryMs = 60_000 } = options;
  let socket: Socket | null = null;
  let retryTimer: NodeJS.Timeout | null = null;
  let pauseMs = retryMs;
  let paused = false;
  let stopped = false;

  function dial(): void {
    retryTimer = null;
    onState('connecting', null);
    const splitter = createLineSplitter();
    const line = connect({ host, port, keepAlive: true, keepAliveInitialDelay: 30_000, noDelay: true });
    socket = line;
    let loggedIn = false;
    let heardAt = performance.now();
    let fault: string | null = null;
    const end = (why: string): void => {
      fault ??= why;
      line.destroy();
    };
    const logIn = (): void => {
      if (loggedIn) return;
      loggedIn = true;
      line.write(`${loginCall}\r\n`);
    };

    const dialTimer = setTimeout(
      () => end(`${host}:${port} did not answer within ${connectTimeoutMs / 1000} s.`),
      connectTimeoutMs,
    );
    let loginTimer: NodeJS.Timeout | null = null;
    const watch = setInterval(
      () => {
        if (line.connecting) return;
        // While we do not read, the silence is ours.
        if (paused) heardAt = performance.now();
        const quietMs = performance.now() - heardAt;
        if (quietMs >= idleTimeoutMs) {
          end(
            `The feed sent nothing for ${Math.round(idleTimeoutMs / 1000)} s; its connection is taken for dead.`,
          );
        }
      },
      Math.min(1_000, idleTimeoutMs / 4),
    );
    const keepalive = setInterval(() => {
      if (loggedIn && !paused && performance.now() - heardAt >= keepaliveMs) line.write('\r\n');
    }, keepaliveMs);

    line.once('connect', () => {
      clearTimeout(dialTimer);
      heardAt = performance.now();
      onState('connected', null);
      loginTimer = setTimeout(logIn, loginAfterMs);
      if (paused) line.pause();
    });
    line.on('data', (chunk) => {
      heardAt = performance.now();
      // Prompts have no line end: the first bytes, whatever they are, are the question who is calling.
      logIn();
      const arrivedAtMs = Date.now();
      for (const one of splitter.push(chunk)) if (onLine(one, arrivedAtMs)) pauseMs = retryMs;
    });
    line.once('end', () => end('The feed closed the connection.'));
    line.once('error', (error) => end(sentenceOf(error)));
    line.once('close', () => {
      clearTimeout(dialTimer);
      if (loginTimer !== null) clearTimeout(loginTimer);
      clearInterval(watch);
      clearInterval(keepalive);
      // What came without its line end is half a spot: the feed sends it again, whole, or it is lost.
      socket = null;
      if (stopped) return;
      onState('lost', fault ?? 'The connection to the feed ended.');
      retryTimer = setTimeout(dial, pauseMs * (0.5 + Math.random() / 2));
      pauseMs = Math.min(pauseMs * 2, longestRetryMs);
    });
  }

  return {
    start: dial,
    pause() {
      paused = true;
      socket?.pause();
    },
    resume() {
      paused = false;
      socket?.resume();
    },
    stop() {
      stopped = true;
      if (retryTimer !== null) clearTimeout(retryTimer);
      socket?.destroy();
    },
  };

  function sentenceOf(error: Error): string {
    const code = 'code' in error ? String(error.code) : '';
    const known: Record<string, string> = {
      ECONNREFUSED: `Nobody answers at ${host}:${port}.`,
      ENOTFOUND: `There is no computer named ${host}.`,
      EAI_AGAIN: `The name ${host} could not be looked up.`,
      ECONNRESET: 'The connection to the feed broke.',
      EPIPE: 'The connection to the feed broke.',
      ETIMEDOUT: `${host}:${port} does not answer.`,
      EHOSTUNREACH: `${host} cannot be reached.`,
      ENETUNREACH: `${host} cannot be reached.`,
    };
    return known[code] ?? `The connection to the feed failed: ${error.message}`;
  }
}
