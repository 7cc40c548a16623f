import { ref } from 'vue';
import type { ComputedRef, Ref } from 'vue';
import { useRouter } from 'vue-router';
import { encodeQuestion } from '../../shared/contracts/comparison-url.ts';
import { asProblem } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import { useComparisonStore } from '../stores/comparison.ts';
import { useTrialsStore } from '../stores/trials.ts';
import { saveBlob } from './save-file.ts';
import { useAnnouncer } from './useAnnouncer.ts';
import type { AskedQuestion } from './useAskedQuestion.ts';

export interface ComparisonKeeping {
  /** What the open dialog saves: a new trial, or the change of the one shown. */
  saving: Ref<'new' | 'same' | null>;
  busy: Ref<boolean>;
  saveProblem: Ref<ApiProblem | null>;
  exportProblem: Ref<ApiProblem | null>;
  savedAs: Ref<string | null>;
  openSave: (kind: 'new' | 'same') => void;
  saveTrial: (text: { name: string; notes: string }) => Promise<void>;
  exportUnits: () => Promise<void>;
}

/** Keeps a question as a trial, and the units of its answer as a file. Failures are shown, never thrown. */
export function useComparisonKeeping(
  stationId: ComputedRef<number>,
  { draft, question, trial }: AskedQuestion,
  fileStem: ComputedRef<string>,
): ComparisonKeeping {
  const router = useRouter();
  const comparison = useComparisonStore();
  const trials = useTrialsStore();
  const { announce } = useAnnouncer();
  const saving = ref<'new' | 'same' | null>(null);
  const busy = ref(false);
  const saveProblem = ref<ApiProblem | null>(null);
  const exportProblem = ref<ApiProblem | null>(null);
  const savedAs = ref<string | null>(null);

  async function saveTrial(text: { name: string; notes: string }): Promise<void> {
    if (question.value === null) return;
    busy.value = true;
    saveProblem.value = null;
    try {
      const saved =
        saving.value === 'same' && trial.value !== null
          ? await trials.update(stationId.value, trial.value.id, { ...text, question: question.value })
          : await trials.save(stationId.value, question.value, text);
      saving.value = null;
      savedAs.value = saved.name;
      announce(`Saved as trial ${saved.name}`);
      await router.replace({ query: { ...encodeQuestion(draft.value), trial: String(saved.id) } });
    } catch (error) {
      saveProblem.value = asProblem(error);
    } finally {
      busy.value = false;
    }
  }

  function openSave(kind: 'new' | 'same'): void {
    saveProblem.value = null;
    savedAs.value = null;
    saving.value = kind;
  }

  async function exportUnits(): Promise<void> {
    if (question.value === null) return;
    busy.value = true;
    exportProblem.value = null;
    try {
      const { blob, fileName } = await comparison.unitsCsv(stationId.value, question.value);
      saveBlob(blob, fileName ?? `${fileStem.value}-units.csv`);
    } catch (error) {
      exportProblem.value = asProblem(error);
    } finally {
      busy.value = false;
    }
  }

  return { saving, busy, saveProblem, exportProblem, savedAs, openSave, saveTrial, exportUnits };
}
