// @vitest-environment node
import { createServer } from 'node:http';
import type { Server, ServerResponse } from 'node:http';
import type { AddressInfo } from 'node:net';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import type { StationEvent } from '../../shared/contracts/event.ts';
import { openEventStream } from './event-stream.ts';
import type { StreamState } from './event-stream.ts';
import { SseReader } from './sse-reader.ts';
import { setApiBase } from './url.ts';

describe('the reader of event streams', () => {
  const text =
    ': comment\r\ndata: {"a":"é"}\r\n\r\nevent: x\ndata:one\ndata\ndata: two\n\nid: 1\n\r\rdata: last\r\r';
  const messages = ['{"a":"é"}', 'one\n\ntwo', 'last'];

  it('gives the same messages wherever the bytes are cut', () => {
    const bytes = new TextEncoder().encode(text);
    for (let cut = 0; cut <= bytes.length; cut += 1) {
      const got: string[] = [];
      const reader = new SseReader((data) => got.push(data));
      reader.push(bytes.subarray(0, cut));
      reader.push(bytes.subarray(cut));
      expect(got, `cut at byte ${cut}`).toEqual(messages);
    }
  });

  it('gives the same messages when every byte comes alone', () => {
    const got: string[] = [];
    const reader = new SseReader((data) => got.push(data));
    for (const byte of new TextEncoder().encode(text)) reader.push(Uint8Array.of(byte));
    expect(got).toEqual(messages);
  });

  it('keeps back a message that is not finished', () => {
    const got: string[] = [];
    new SseReader((data) => got.push(data)).push(new TextEncoder().encode('data: half\n'));
    expect(got).toEqual([]);
  });
});

describe('the event stream of a station', () => {
  let server: Server;
  let connections: ServerResponse[];
  let status: number;
  let close: (() => void) | null;

  beforeEach(async () => {
    connections = [];
    status = 200;
    close = null;
    server = createServer((_, response) => {
      response.writeHead(status, { 'content-type': 'text/event-stream' });
      response.write(': hello\n\n');
      connections.push(response);
      if (status !== 200) response.end();
    });
    await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
    setApiBase(`http://127.0.0.1:${(server.address() as AddressInfo).port}/api`);
  });
  afterEach(async () => {
    close?.();
    server.closeAllConnections();
    await new Promise((resolve) => server.close(resolve));
  });

  /** Opens the stream and lets the test wait for states and events by name. */
  function follow(options: { silenceMs?: number } = {}) {
    const log: string[] = [];
    const waiting: { wanted: string; times: number; resolve: () => void }[] = [];
    const count = (entry: string) => log.filter((each) => each === entry).length;
    const note = (entry: string) => {
      log.push(entry);
      for (const each of waiting) if (count(each.wanted) >= each.times) each.resolve();
    };
    close = openEventStream({
      stationId: 1,
      firstWaitMs: 1,
      longestWaitMs: 4,
      ...options,
      onEvent: (event: StationEvent) => note(`event ${event.type}`),
      onState: (state: StreamState) => note(state),
    });
    const until = (wanted: string, times = 1) =>
      new Promise<void>((resolve) => {
        waiting.push({ wanted, times, resolve });
        if (count(wanted) >= times) resolve();
      });
    return { log, until };
  }

  it('delivers known events and passes over unknown and broken ones', async () => {
    const { log, until } = follow();
    await until('open');
    connections[0]?.write('data: {"type":"news"}\n\ndata: {broken\n\ndata: {"type":"spots","stored":3}\n\n');
    await until('event spots');
    expect(log).toEqual(['connecting', 'open', 'event spots']);
  });

  it('comes back after the server closed it, and says that there was a gap', async () => {
    const { log, until } = follow();
    await until('open');
    connections[0]?.end();
    await until('open', 2);
    expect(log).toEqual(['connecting', 'open', 'waiting', 'connecting', 'open']);
  });

  it('gives up a connection on which nothing is heard any more', async () => {
    const { until, log } = follow({ silenceMs: 250 });
    // Nothing ends these connections but the silence itself.
    await until('open', 2);
    expect(log.slice(log.indexOf('open') + 1, log.lastIndexOf('open'))).toContain('waiting');
  });

  it('keeps trying while the server is down', async () => {
    status = 503;
    const { until, log } = follow();
    await until('waiting', 3);
    status = 200;
    await until('open');
    expect(log.at(-1)).toBe('open');
  });

  it('does not knock again once it is told no', async () => {
    status = 403;
    const { log, until } = follow();
    await until('closed');
    expect(log).toEqual(['connecting', 'closed']);
    expect(connections).toHaveLength(1);
  });

  it('ends at once when it is closed', async () => {
    const { until, log } = follow();
    await until('open');
    close?.();
    await until('closed');
    expect(log.at(-1)).toBe('closed');
  });
});
