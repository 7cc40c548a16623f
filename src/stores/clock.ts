import { computed, ref } from 'vue';
import { defineStore } from 'pinia';

/** The time, once for the whole page: a tick on each full second, and a coarser one for what is slow to work out. */
export const useClockStore = defineStore('clock', () => {
  const nowMs = ref(Date.now());
  /** Start of the current minute; changes once a minute. */
  const minuteMs = computed(() => Math.floor(nowMs.value / 60_000) * 60_000);
  let timer: ReturnType<typeof setTimeout> | null = null;

  function tick(): void {
    nowMs.value = Date.now();
    // Re-aimed at each tick: an interval drifts, and a laptop that slept must not catch up tick by tick.
    timer = setTimeout(tick, 1000 - (nowMs.value % 1000));
  }

  function start(): void {
    if (timer === null) tick();
  }
  function stop(): void {
    if (timer !== null) clearTimeout(timer);
    timer = null;
  }

  return { nowMs, minuteMs, start, stop };
});
