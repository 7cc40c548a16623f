import { computed, onScopeDispose, shallowRef, watch } from 'vue';
import type { ComputedRef } from 'vue';
import { useRoute } from 'vue-router';
import { useThrottleFn } from '@vueuse/core';
import type { Dwell } from '../../shared/contracts/dwell.ts';
import type { Receiver } from '../../shared/contracts/receiver.ts';
import type { Place } from '../../shared/radio/place.ts';
import { decodeTime, encodeTime, presetRange } from '../components/switching/time-presets.ts';
import type { TimeChoice, TimePreset } from '../components/switching/time-presets.ts';
import { spanOf, tidyRange } from '../components/switching/time-scale.ts';
import type { TimeRange } from '../components/switching/time-scale.ts';
import { useClockStore } from '../stores/clock.ts';
import { useStationStore } from '../stores/station.ts';
import { useSwitchingStore } from '../stores/switching.ts';
import { useEventStream } from './useEventStream.ts';
import { useQueryChange } from './useQueryChange.ts';

export interface LogStretch {
  place: ComputedRef<Place>;
  range: ComputedRef<TimeRange>;
  preset: ComputedRef<TimePreset | null>;
  /** What counts as now on the line. */
  lineNowMs: ComputedRef<number>;
  inView: ComputedRef<Dwell[]>;
  /** Receivers in use, and those put away that the log still tells of. */
  lineReceivers: ComputedRef<Receiver[]>;
  showTime: (next: TimeChoice) => void;
  /** `settled` false while a finger is still moving. */
  setRange: (next: TimeRange, settled: boolean) => void;
}

/** The stretch of time of the switch log that is in view, by the address; keeps the log of it loaded and current. */
export function useLogStretch(): LogStretch {
  const route = useRoute();
  const setQuery = useQueryChange();
  const here = useStationStore();
  const clock = useClockStore();
  const log = useSwitchingStore();

  const place = computed(() => ({
    latitude: here.station?.latitudeDeg ?? 0,
    longitude: here.station?.longitudeDeg ?? 0,
  }));
  const choice = computed(() => decodeTime(route.query));
  /** While a finger moves the line; the address follows when it is let go. */
  const underHand = shallowRef<TimeRange | null>(null);
  const range = computed<TimeRange>(() => {
    if (underHand.value !== null) return underHand.value;
    if ('range' in choice.value) return choice.value.range;
    return presetRange(choice.value.preset, clock.minuteMs, place.value);
  });
  /** A preset that is followed; null where the stretch was chosen by hand. */
  const preset = computed(() =>
    'preset' in choice.value && underHand.value === null ? choice.value.preset : null,
  );
  /** The line moves on by the second only where a second can be seen. */
  const lineNowMs = computed(() => (spanOf(range.value) < 3_600_000 ? clock.nowMs : clock.minuteMs));
  const inView = computed(() =>
    log.dwells.filter(
      ({ startsAt, endsAt }) =>
        Date.parse(startsAt) < range.value.toMs &&
        (endsAt === null || Date.parse(endsAt) > range.value.fromMs),
    ),
  );
  const lineReceivers = computed(() => {
    const logged = new Set(log.dwells.map(({ receiverId }) => receiverId));
    return here.receivers.filter(({ id, retiredAt }) => retiredAt === null || logged.has(id));
  });

  function showTime(next: TimeChoice): void {
    underHand.value = null;
    setQuery({ from: undefined, to: undefined, show: undefined, ...encodeTime(next) });
  }

  function setRange(next: TimeRange, settled: boolean): void {
    if (settled) showTime({ range: tidyRange(next) });
    else underHand.value = next;
  }

  const loadRange = useThrottleFn(() => void log.show(here.stationId!, range.value), 300, true);
  watch([() => here.stationId, () => range.value.fromMs, () => range.value.toMs], () => void loadRange(), {
    immediate: true,
  });
  watch(
    () => here.stationId,
    () => void log.loadHistory(here.stationId!),
    { immediate: true },
  );
  onScopeDispose(log.leave);

  const reloadSoon = useThrottleFn(
    () => {
      void log.reload();
      void log.loadHistory(here.stationId!);
    },
    1000,
    true,
  );
  useEventStream(() => here.stationId, {
    onEvent(event) {
      if (event.type === 'switch') void reloadSoon();
    },
    onGap() {
      void reloadSoon();
    },
  });

  return { place, range, preset, lineNowMs, inView, lineReceivers, showTime, setRange };
}
