/**
 * Server-sent events read with fetch, so that the access token travels in the usual header and never in an
 * address. Reconnects for as long as it is wanted: a wall screen outlives many restarts of the server.
 */
import { eventStream, stationEvent } from '../../shared/contracts/event.ts';
import type { StationEvent } from '../../shared/contracts/event.ts';
import { openBody } from './client.ts';
import { asProblem, isAbort, parseJson } from './problem.ts';
import { SseReader } from './sse-reader.ts';

export type StreamState = 'connecting' | 'open' | 'waiting' | 'closed';

export interface EventStreamOptions {
  stationId: number;
  onEvent: (event: StationEvent) => void;
  /** `open` again after `waiting` means that events may have been missed: load anew what they would have changed. */
  onState: (state: StreamState) => void;
  /** First wait before reconnecting; doubles up to `longestWaitMs`, each wait drawn from its upper half. */
  firstWaitMs?: number;
  longestWaitMs?: number;
  /** The server sends something every 20 seconds; after this long without a byte the connection is dead. */
  silenceMs?: number;
  random?: () => number;
}

/** Opens the stream of one station. Returns the way to close it. */
export function openEventStream(options: EventStreamOptions): () => void {
  const { firstWaitMs = 1000, longestWaitMs = 30_000, silenceMs = 45_000, random = Math.random } = options;
  const closing = new AbortController();
  let failures = 0;

  const run = async () => {
    while (!closing.signal.aborted) {
      options.onState('connecting');
      const over = await readOnce(options, silenceMs, closing.signal, () => {
        failures = 0;
        options.onState('open');
      });
      if (over || closing.signal.aborted) break;
      options.onState('waiting');
      const wait = Math.min(longestWaitMs, firstWaitMs * 2 ** Math.min(failures, 20));
      failures += 1;
      // Jitter: all the tabs of a club must not knock at the same instant when the server comes back.
      await sleep(wait * (0.5 + random() / 2), closing.signal);
    }
    options.onState('closed');
  };
  void run();
  return () => closing.abort();
}

/** One connection until it ends. Returns true when there is no point in another. */
async function readOnce(
  options: EventStreamOptions,
  silenceMs: number,
  closed: AbortSignal,
  onOpen: () => void,
): Promise<boolean> {
  const connection = new AbortController();
  const stop = () => connection.abort();
  closed.addEventListener('abort', stop);
  // A half-open connection never reports an error: only silence gives it away.
  let watchdog = setTimeout(stop, silenceMs);
  try {
    const body = await openBody(eventStream, {
      params: { stationId: options.stationId },
      signal: connection.signal,
    });
    onOpen();
    const reader = body.getReader();
    const messages = new SseReader((data) => deliver(data, options.onEvent));
    for (;;) {
      const { done, value } = await reader.read();
      if (done) return false;
      clearTimeout(watchdog);
      watchdog = setTimeout(stop, silenceMs);
      messages.push(value);
    }
  } catch (error) {
    if (isAbort(error)) return false;
    const { status } = asProblem(error);
    return status === 401 || status === 403 || status === 404;
  } finally {
    clearTimeout(watchdog);
    closed.removeEventListener('abort', stop);
    connection.abort();
  }
}

/** An event that this version of the page does not know is passed over: the server may be newer. */
function deliver(data: string, onEvent: (event: StationEvent) => void): void {
  const parsed = stationEvent.safeParse(parseJson(data));
  if (parsed.success) onEvent(parsed.data);
}

function sleep(ms: number, signal: AbortSignal): Promise<void> {
  return new Promise((resolve) => {
    if (signal.aborted) {
      resolve();
      return;
    }
    const done = () => {
      clearTimeout(timer);
      signal.removeEventListener('abort', done);
      resolve();
    };
    const timer = setTimeout(done, ms);
    signal.addEventListener('abort', done);
  });
}
