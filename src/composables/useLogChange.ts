import { ref, shallowRef } from 'vue';
import type { Ref, ShallowRef } from 'vue';
import type { DwellChange, DwellPreview } from '../../shared/contracts/dwell.ts';
import { asProblem, isAbort } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import { previewLines } from '../components/switching/preview-words.ts';
import { useStationStore } from '../stores/station.ts';
import { useSwitchingStore } from '../stores/switching.ts';
import { useAnnouncer } from './useAnnouncer.ts';

/** What a person is asked to confirm. */
export type AskedOfLog =
  | { kind: 'change'; title: string; change: DwellChange }
  | { kind: 'undo'; title: string; batchId: string; summary: string };

export interface LogChange {
  asked: ShallowRef<AskedOfLog | null>;
  /** What the asked change would do; null until it is counted. */
  preview: ShallowRef<DwellPreview | null>;
  /** A change that the server would not even count. */
  refused: ShallowRef<{ change: DwellChange; problem: ApiProblem } | null>;
  applying: Ref<boolean>;
  applyProblem: ShallowRef<ApiProblem | null>;
  /** What was done last; with its batch, while it can be undone. */
  done: ShallowRef<{ words: string; batchId: string | null } | null>;
  /** Counts a change and asks. Never rejects. */
  propose: (change: DwellChange, title: string) => Promise<void>;
  proposeUndo: (batchId: string) => void;
  stopAsking: () => void;
  /** Does what is asked. Never rejects: a failure becomes `applyProblem`. */
  confirm: () => Promise<void>;
}

const sentence = (made: DwellPreview) => `${previewLines(made).join('; ')}.`;

/** Changing the switch log of the station: counted first, then done. `onApplied` is told of changes, not of undoing. */
export function useLogChange(onApplied: () => void): LogChange {
  const here = useStationStore();
  const log = useSwitchingStore();
  const { announce } = useAnnouncer();
  const asked = shallowRef<AskedOfLog | null>(null);
  const preview = shallowRef<DwellPreview | null>(null);
  const refused = shallowRef<{ change: DwellChange; problem: ApiProblem } | null>(null);
  const applying = ref(false);
  const applyProblem = shallowRef<ApiProblem | null>(null);
  const done = shallowRef<{ words: string; batchId: string | null } | null>(null);
  let counting: AbortController | null = null;

  async function propose(change: DwellChange, title: string): Promise<void> {
    counting?.abort();
    const mine = new AbortController();
    counting = mine;
    asked.value = { kind: 'change', title, change };
    preview.value = null;
    refused.value = null;
    applyProblem.value = null;
    done.value = null;
    try {
      const counted = await log.preview(here.stationId!, [change], mine.signal);
      if (counting === mine) preview.value = counted;
    } catch (error) {
      if (counting !== mine || isAbort(error)) return;
      asked.value = null;
      refused.value = { change, problem: asProblem(error) };
    }
  }

  function proposeUndo(batchId: string): void {
    const entry = log.history.find((each) => each.batchId === batchId);
    if (!entry) return;
    applyProblem.value = null;
    done.value = null;
    asked.value = { kind: 'undo', title: 'Take this change back', batchId, summary: entry.summary };
  }

  function stopAsking(): void {
    counting?.abort();
    counting = null;
    asked.value = null;
  }

  async function confirm(): Promise<void> {
    const what = asked.value;
    if (what === null) return;
    applying.value = true;
    applyProblem.value = null;
    try {
      if (what.kind === 'change') {
        const { batchId, preview: made } = await log.apply(here.stationId!, [what.change]);
        done.value = { words: `Done. ${sentence(made)}`, batchId };
        onApplied();
      } else {
        done.value = {
          words: `Taken back. ${sentence(await log.undo(here.stationId!, what.batchId))}`,
          batchId: null,
        };
      }
      asked.value = null;
      announce(done.value.words);
      await here.reloadNowOn();
    } catch (error) {
      applyProblem.value = asProblem(error);
    } finally {
      applying.value = false;
    }
  }

  return { asked, preview, refused, applying, applyProblem, done, propose, proposeUndo, stopAsking, confirm };
}
