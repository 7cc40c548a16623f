import { computed, shallowRef } from 'vue';
import type { ComputedRef, ShallowRef } from 'vue';
import { useRoute } from 'vue-router';
import type { Dwell } from '../../shared/contracts/dwell.ts';
import type { Receiver } from '../../shared/contracts/receiver.ts';
import type { OpenedGap } from '../components/switching/DwellPanel.vue';
import type { LaneGap, LaneItem } from '../components/switching/lane.ts';
import { useStationStore } from '../stores/station.ts';
import { useSwitchingStore } from '../stores/switching.ts';
import { useQueryChange } from './useQueryChange.ts';

export interface OpenedPart {
  gap: Readonly<ShallowRef<OpenedGap | null>>;
  /** Id of the dwell that the address names, whether or not it is loaded. */
  chosenId: ComputedRef<number | null>;
  dwell: ComputedRef<Dwell | null>;
  /** Changes whenever something else is opened; null: nothing is. */
  panelKey: ComputedRef<string | null>;
  panelReceiver: ComputedRef<Receiver | undefined>;
  openItem: (receiverId: number, item: LaneItem) => void;
  openDwell: (dwell: Dwell) => void;
  close: () => void;
}

/** What is opened of the switch log: a dwell (in the address) or a gap. */
export function useOpenedPart(): OpenedPart {
  const route = useRoute();
  const setQuery = useQueryChange();
  const here = useStationStore();
  const log = useSwitchingStore();

  const gap = shallowRef<OpenedGap | null>(null);
  const chosenId = computed(() => (route.query.dwell ? Number(route.query.dwell) : null));
  const dwell = computed(() => log.dwells.find(({ id }) => id === chosenId.value) ?? null);
  const panelKey = computed(() => {
    if (gap.value) return `g${gap.value.receiverId}-${gap.value.fromMs}`;
    return dwell.value ? `d${dwell.value.id}` : null;
  });
  const panelReceiver = computed(() =>
    here.receiverById.get(gap.value?.receiverId ?? dwell.value?.receiverId ?? -1),
  );

  function openItem(receiverId: number, item: LaneItem): void {
    if (item.kind === 'dwell') openDwell(item.dwell);
    else if (item.kind === 'gap') {
      gap.value = wholeGap(receiverId, item);
      setQuery({ dwell: undefined });
    }
  }

  /** The line shows the part of a gap that is in view; what is opened reaches from dwell to dwell. */
  function wholeGap(receiverId: number, item: LaneGap): OpenedGap {
    const before = log.dwells.filter((each) => each.receiverId === receiverId && each.endsAt !== null);
    const fromMs = Math.max(
      ...before.map(({ endsAt }) => Date.parse(endsAt!)).filter((endMs) => endMs <= item.toMs),
      // Where the log holds nothing before it, the gap begins where the view does.
      ...(before.some(({ endsAt }) => Date.parse(endsAt!) <= item.toMs) ? [] : [item.fromMs]),
    );
    const after = log.dwells.find(
      (each) => each.receiverId === receiverId && Date.parse(each.startsAt) >= item.toMs,
    );
    return {
      receiverId,
      fromMs,
      toMs: after ? Date.parse(after.startsAt) : item.isOpen ? null : item.toMs,
    };
  }

  function openDwell(next: Dwell): void {
    gap.value = null;
    setQuery({ dwell: String(next.id) });
  }

  function close(): void {
    gap.value = null;
    setQuery({ dwell: undefined });
  }

  return { gap, chosenId, dwell, panelKey, panelReceiver, openItem, openDwell, close };
}
