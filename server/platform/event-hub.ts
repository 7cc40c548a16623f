import { eventChannel, notification } from '../../shared/contracts/event.ts';
import type { StationEvent } from '../../shared/contracts/event.ts';
import { createListener } from './listener.ts';
import type { Logger } from './logger.ts';

export type EventSink = (event: StationEvent) => void;

/** Spreads PostgreSQL's notifications over the browsers of each station. One listener a process. */
export interface EventHub {
  subscribe(stationId: number, sink: EventSink): () => void;
  start(): Promise<void>;
  stop(): Promise<void>;
  readonly subscribers: number;
}

export function createEventHub(options: { url: string; logger: Logger }): EventHub {
  const sinks = new Map<number, Set<EventSink>>();
  let everConnected = false;

  function spread(stationId: number, event: StationEvent): void {
    for (const sink of sinks.get(stationId) ?? []) sink(event);
  }

  const listener = createListener({
    url: options.url,
    channels: [eventChannel],
    logger: options.logger,
    onMessage(_channel, payload) {
      const parsed = notification.safeParse(JSON.parse(payload));
      if (parsed.success) spread(parsed.data.stationId, parsed.data.event);
      else options.logger.error({ payload }, 'a notification that no contract knows');
    },
    onConnected() {
      // Messages sent while the connection was down are gone: everybody reads anew.
      if (everConnected) for (const stationId of sinks.keys()) spread(stationId, { type: 'station' });
      everConnected = true;
    },
  });

  return {
    subscribe(stationId, sink) {
      const set = sinks.get(stationId) ?? new Set();
      sinks.set(stationId, set.add(sink));
      return () => {
        set.delete(sink);
        if (set.size === 0) sinks.delete(stationId);
      };
    },
    start: () => listener.start(),
    stop: () => listener.stop(),
    get subscribers() {
      return [...sinks.values()].reduce((sum, set) => sum + set.size, 0);
    },
  };
}
