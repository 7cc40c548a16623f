import { createPinia, setActivePinia } from 'pinia';
import { afterEach, beforeEach, expect, it, vi } from 'vitest';
import { useClockStore } from './clock.ts';

beforeEach(() => {
  vi.useFakeTimers({ now: new Date('2026-11-30T18:04:58.400Z') });
  setActivePinia(createPinia());
});
afterEach(() => {
  useClockStore().stop();
  vi.useRealTimers();
});

it('ticks on full seconds, and changes its minute once a minute', () => {
  const clock = useClockStore();
  clock.start();
  clock.start();
  const seconds: string[] = [];
  for (let step = 0; step < 3; step += 1) {
    vi.advanceTimersToNextTimer();
    seconds.push(new Date(clock.nowMs).toISOString().slice(17));
  }
  expect(seconds).toEqual(['59.000Z', '00.000Z', '01.000Z']);
  expect(new Date(clock.minuteMs).toISOString()).toBe('2026-11-30T18:05:00.000Z');
});

it('catches up in one tick after the computer slept', () => {
  const clock = useClockStore();
  clock.start();
  vi.setSystemTime(new Date('2026-12-01T06:00:00.000Z'));
  vi.advanceTimersToNextTimer();
  expect(new Date(clock.nowMs).toISOString().slice(0, 13)).toBe('2026-12-01T06');
  expect(vi.getTimerCount()).toBe(1);
});

it('stands still once stopped', () => {
  const clock = useClockStore();
  clock.start();
  clock.stop();
  expect(vi.getTimerCount()).toBe(0);
});
