import { ref, shallowRef } from 'vue';
import type { Ref, ShallowRef } from 'vue';
import { asProblem } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import type { Doubt } from '../components/station/station-doubt.ts';
import { useStationSetupStore } from '../stores/station-setup.ts';
import { useAnnouncer } from './useAnnouncer.ts';

export interface StationDoubt {
  doubt: ShallowRef<Doubt | null>;
  doubtBusy: Ref<boolean>;
  doubtProblem: ShallowRef<ApiProblem | null>;
  ask: (next: Doubt) => void;
  /** Does what was asked about. A failure is shown with the question, never thrown. */
  settle: (today: string) => Promise<void>;
}

/** What is asked about before it leaves the station, and what becomes of it. */
export function useStationDoubt(): StationDoubt {
  const setup = useStationSetupStore();
  const { announce } = useAnnouncer();
  const doubt = shallowRef<Doubt | null>(null);
  const doubtBusy = ref(false);
  const doubtProblem = shallowRef<ApiProblem | null>(null);

  function ask(next: Doubt): void {
    doubtProblem.value = null;
    doubt.value = next;
  }

  async function settle(today: string): Promise<void> {
    const asked = doubt.value;
    if (!asked) return;
    doubtBusy.value = true;
    doubtProblem.value = null;
    try {
      if (asked.kind === 'retire') await setup.saveAntenna(asked.antenna.id, { inServiceTo: today });
      else if (asked.kind === 'remove') await setup.removeAntenna(asked.antenna.id);
      else await setup.removeFeed(asked.feed.id);
      doubt.value = null;
      announce(asked.kind === 'retire' ? 'Taken out of service.' : 'Removed.');
    } catch (error) {
      doubtProblem.value = asProblem(error);
    } finally {
      doubtBusy.value = false;
    }
  }

  return { doubt, doubtBusy, doubtProblem, ask, settle };
}
