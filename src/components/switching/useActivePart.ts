import { computed, ref, toValue, watch } from 'vue';
import type { ComputedRef, MaybeRefOrGetter, Ref } from 'vue';
import { itemAt, laneKey } from './lane.ts';
import type { LaneItem } from './lane.ts';
import type { TimeRange } from './time-scale.ts';

interface Lane {
  receiver: { id: number };
  items: readonly LaneItem[];
}

export interface ActivePart {
  /** Row and key of the part pointed at; null: none. */
  active: Readonly<Ref<{ lane: number; key: string } | null>>;
  activeItem: ComputedRef<LaneItem | null>;
  /** Points at a part of a row; a row or part that is null points at nothing. */
  point: (lane: number | null, item: LaneItem | null) => void;
  /** Points so many parts further on in the row, at most at its first or last. */
  step: (by: number) => void;
  /** Points at what lies above or below, so many rows down. */
  changeLane: (by: number) => void;
}

/** The one part of the time line that is pointed at: by mouse (hover), finger (tap) and keyboard (arrows). */
export function useActivePart(
  lanes: MaybeRefOrGetter<readonly Lane[]>,
  range: () => TimeRange,
  widthPx: MaybeRefOrGetter<number>,
): ActivePart {
  const active = ref<{ lane: number; key: string } | null>(null);
  const activeItem = computed(() => {
    if (active.value === null) return null;
    const lane = toValue(lanes)[active.value.lane];
    return lane?.items.find((item) => laneKey(lane.receiver.id, item) === active.value!.key) ?? null;
  });
  watch(range, () => {
    if (activeItem.value === null) active.value = null;
  });

  function point(lane: number | null, item: LaneItem | null): void {
    const receiver = lane === null ? undefined : toValue(lanes)[lane]?.receiver;
    active.value =
      lane === null || item === null || !receiver ? null : { lane, key: laneKey(receiver.id, item) };
  }

  function step(by: number): void {
    const lane = active.value?.lane ?? 0;
    const items = toValue(lanes)[lane]?.items ?? [];
    if (items.length === 0) return;
    const at = activeItem.value === null ? -1 : items.indexOf(activeItem.value);
    const from = at === -1 && by < 0 ? items.length : at;
    point(lane, items[Math.min(items.length - 1, Math.max(0, from + by))]!);
  }

  function changeLane(by: number): void {
    const lane = Math.min(toValue(lanes).length - 1, Math.max(0, (active.value?.lane ?? 0) + by));
    const middlePx =
      activeItem.value === null
        ? toValue(widthPx) / 2
        : (activeItem.value.leftPx + activeItem.value.rightPx) / 2;
    const items = toValue(lanes)[lane]?.items ?? [];
    point(lane, itemAt(items, middlePx, 1) ?? items.at(-1) ?? null);
  }

  return { active, activeItem, point, step, changeLane };
}
