import { onScopeDispose, readonly, ref, toValue, watch } from 'vue';
import type { MaybeRefOrGetter, Ref } from 'vue';
import type { StationEvent } from '../../shared/contracts/event.ts';
import { openEventStream } from '../api/event-stream.ts';
import type { StreamState } from '../api/event-stream.ts';

export interface EventListener {
  onEvent: (event: StationEvent) => void;
  /** The connection is back after a break: events may have been missed, load anew what they would have changed. */
  onGap?: () => void;
}

interface SharedStream {
  listeners: Set<EventListener>;
  state: Ref<StreamState>;
  close: () => void;
}

/** One connection a station in this tab: browsers allow six to a server over HTTP/1.1, and views come and go. */
const streams = new Map<number, SharedStream>();

function join(stationId: number, listener: EventListener): SharedStream {
  let stream = streams.get(stationId);
  if (!stream) {
    const listeners = new Set<EventListener>();
    const state = ref<StreamState>('connecting');
    let broken = false;
    const close = openEventStream({
      stationId,
      onEvent: (event) => {
        for (const each of listeners) each.onEvent(event);
      },
      onState: (next) => {
        state.value = next;
        if (next === 'waiting') broken = true;
        if (next === 'open' && broken) {
          broken = false;
          for (const each of listeners) each.onGap?.();
        }
      },
    });
    stream = { listeners, state, close };
    streams.set(stationId, stream);
  }
  stream.listeners.add(listener);
  return stream;
}

function leave(stationId: number, stream: SharedStream, listener: EventListener): void {
  stream.listeners.delete(listener);
  if (stream.listeners.size > 0) return;
  stream.close();
  if (streams.get(stationId) === stream) streams.delete(stationId);
}

/**
 * Listens to a station's events until the scope ends; null listens to nothing. The listener follows when the
 * station changes.
 */
export function useEventStream(
  stationId: MaybeRefOrGetter<number | null>,
  listener: EventListener,
): { state: Readonly<Ref<StreamState>> } {
  const state = ref<StreamState>('closed');
  const stop = watch(
    () => toValue(stationId),
    (id, _, onCleanup) => {
      if (id === null) {
        state.value = 'closed';
        return;
      }
      const stream = join(id, listener);
      const stopState = watch(stream.state, (next) => (state.value = next), { immediate: true });
      onCleanup(() => {
        stopState();
        leave(id, stream, listener);
      });
    },
    { immediate: true },
  );
  onScopeDispose(stop);
  return { state: readonly(state) };
}
