import { onScopeDispose, reactive, ref } from 'vue';
import type { Ref } from 'vue';
import type { Dwell } from '../../shared/contracts/dwell.ts';
import { asProblem } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import type { SwitchOutcome, SwitchRequest } from '../components/switching/now-on.ts';
import { useClockStore } from '../stores/clock.ts';
import { useStationStore } from '../stores/station.ts';
import { useSwitchingStore } from '../stores/switching.ts';
import { formatUtcTime } from '../../shared/format.ts';

export interface ReceiverSwitching {
  /** By receiver: what became of its last switch. */
  outcomes: ReadonlyMap<number, SwitchOutcome>;
  switchProblems: ReadonlyMap<number, ApiProblem>;
  busyReceiver: Readonly<Ref<number | null>>;
  /** Logs a switch. Never rejects: a failure stands in `switchProblems`. */
  switchTo: (asked: SwitchRequest) => Promise<void>;
  /** Takes the last switch of a receiver back, while that is offered. Never rejects. */
  undoSwitch: (receiverId: number) => Promise<void>;
}

const undoOfferedMs = 20_000;

/** Logging what the receivers of the station are on by one press each, with a while to take it back. */
export function useReceiverSwitching(): ReceiverSwitching {
  const here = useStationStore();
  const clock = useClockStore();
  const log = useSwitchingStore();
  /** By receiver: what the last press did, and whether it can be taken back here. */
  const outcomes = reactive(new Map<number, SwitchOutcome & { logged: Dwell | null }>());
  const switchProblems = reactive(new Map<number, ApiProblem>());
  const busyReceiver = ref<number | null>(null);
  const undoTimers = new Map<number, ReturnType<typeof setTimeout>>();

  async function switchTo({ receiverId, antennaId, at }: SwitchRequest): Promise<void> {
    busyReceiver.value = receiverId;
    switchProblems.delete(receiverId);
    forgetOutcome(receiverId);
    const label = here.receiverById.get(receiverId)?.label ?? 'Receiver';
    const name = antennaId === null ? null : (here.antennaById.get(antennaId)?.name ?? 'the antenna');
    try {
      const { dwell, changed, warning } = await log.switchTo(
        here.stationId!,
        receiverId,
        antennaId,
        at ?? undefined,
      );
      const when = at ?? (changed ? (dwell?.startsAt ?? clock.nowMs) : null);
      const state = name === null ? 'disconnected' : `on ${name}`;
      const words = changed
        ? `Logged: ${label} ${state} at ${formatUtcTime(when, true)}.`
        : `${label} was ${state} already: nothing was logged.`;
      outcomes.set(receiverId, { words, warning, canUndo: changed, logged: dwell });
      if (changed) {
        const timer = setTimeout(() => forgetOutcome(receiverId), undoOfferedMs);
        undoTimers.set(receiverId, timer);
      }
      await here.reloadNowOn();
    } catch (error) {
      switchProblems.set(receiverId, asProblem(error));
    } finally {
      busyReceiver.value = null;
    }
  }

  function forgetOutcome(receiverId: number): void {
    clearTimeout(undoTimers.get(receiverId));
    undoTimers.delete(receiverId);
    outcomes.delete(receiverId);
  }

  async function undoSwitch(receiverId: number): Promise<void> {
    const outcome = outcomes.get(receiverId);
    if (!outcome) return;
    busyReceiver.value = receiverId;
    switchProblems.delete(receiverId);
    try {
      await log.undoSwitch(here.stationId!, receiverId, outcome.logged);
      forgetOutcome(receiverId);
      outcomes.set(receiverId, { words: 'Taken back.', warning: null, canUndo: false, logged: null });
      await here.reloadNowOn();
    } catch (error) {
      switchProblems.set(receiverId, asProblem(error));
    } finally {
      busyReceiver.value = null;
    }
  }
  onScopeDispose(() => {
    for (const timer of undoTimers.values()) clearTimeout(timer);
  });

  return { outcomes, switchProblems, busyReceiver, switchTo, undoSwitch };
}
