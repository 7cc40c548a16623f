import { ref, shallowRef } from 'vue';
import { defineStore } from 'pinia';
import { archiveTrial, listTrials, saveTrial, updateTrial } from '../../shared/contracts/comparison.ts';
import type { ComparisonQuestion, Trial } from '../../shared/contracts/comparison.ts';
import { request } from '../api/client.ts';
import { asProblem } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import type { LoadState } from '../composables/useLoad.ts';

interface TrialText {
  name: string;
  notes: string;
}

/** Saved comparison questions of one station, the latest first. */
export const useTrialsStore = defineStore('trials', () => {
  const state = ref<LoadState>('idle');
  const trials = shallowRef<Trial[]>([]);
  const problem = shallowRef<ApiProblem | null>(null);
  let stationId: number | null = null;

  /** Reads the list anew. Never rejects: a failure becomes the state. */
  async function load(id: number): Promise<void> {
    if (stationId !== id) trials.value = [];
    stationId = id;
    state.value = 'loading';
    try {
      const { items } = await request(listTrials, { params: { stationId: id } });
      if (stationId !== id) return;
      put(items);
      problem.value = null;
      state.value = 'ready';
    } catch (error) {
      if (stationId !== id) return;
      problem.value = asProblem(error);
      state.value = 'failed';
    }
  }

  function put(items: readonly Trial[]): void {
    trials.value = [...items].sort((one, other) => other.updatedAt.localeCompare(one.updatedAt));
  }

  /** @throws ApiProblem */
  async function save(id: number, question: ComparisonQuestion, text: TrialText): Promise<Trial> {
    const saved = await request(saveTrial, { params: { stationId: id }, body: { ...text, question } });
    if (stationId === id) put([...trials.value, saved]);
    return saved;
  }

  /** @throws ApiProblem */
  async function update(
    id: number,
    trialId: number,
    change: Partial<TrialText & { question: ComparisonQuestion }>,
  ): Promise<Trial> {
    const saved = await request(updateTrial, { params: { stationId: id, trialId }, body: change });
    if (stationId === id) put(trials.value.map((each) => (each.id === trialId ? saved : each)));
    return saved;
  }

  /** Puts a trial away. @throws ApiProblem */
  async function archive(id: number, trialId: number): Promise<void> {
    await request(archiveTrial, { params: { stationId: id, trialId } });
    if (stationId === id) trials.value = trials.value.filter((each) => each.id !== trialId);
  }

  return { state, trials, problem, load, save, update, archive };
});
