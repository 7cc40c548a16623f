import { onScopeDispose, toValue, watch } from 'vue';
import type { MaybeRefOrGetter } from 'vue';
import { useDocumentVisibility, useIntervalFn, useThrottleFn } from '@vueuse/core';
import { useStationStore } from '../stores/station.ts';
import { useTonightStore } from '../stores/tonight.ts';
import { useEventStream } from './useEventStream.ts';

/**
 * Keeps the answer of tonight current until the scope ends: asked each minute, at switches, and after a break of the
 * stream; pairs come by themselves in between. `against`: the antenna to measure against, null the server's choice.
 */
export function useTonightAnswer(against: MaybeRefOrGetter<number | null>): { load: () => void } {
  const here = useStationStore();
  const tonight = useTonightStore();

  const load = () => void tonight.load(here.stationId!, toValue(against));
  const visibility = useDocumentVisibility();
  watch([() => here.stationId, () => toValue(against)], load, { immediate: true });
  const { pause, resume } = useIntervalFn(load, 60_000);
  // A tab that nobody sees asks nothing; a wall screen is seen.
  watch(visibility, (now) => {
    if (now === 'hidden') pause();
    else {
      load();
      resume();
    }
  });
  const loadSoon = useThrottleFn(load, 2000, true);
  useEventStream(() => here.stationId, {
    onEvent(event) {
      if (event.type === 'pairs') tonight.append(event.pairs);
      else if (event.type === 'switch' || event.type === 'station') void loadSoon();
    },
    onGap: load,
  });
  onScopeDispose(tonight.leave);

  return { load };
}
