import { onScopeDispose, ref, shallowRef } from 'vue';
import type { Ref, ShallowRef } from 'vue';
import { asProblem, isAbort } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';

/** The four faces of everything that is fetched. */
export type LoadState = 'idle' | 'loading' | 'ready' | 'failed';

export interface Load<T> {
  state: Ref<LoadState>;
  /** The last answer; kept while a newer one is on its way and when that fails. */
  data: ShallowRef<T | null>;
  problem: ShallowRef<ApiProblem | null>;
  /** Asks (again). A newer call takes the older one back. Never rejects: a failure becomes the state. */
  run: () => Promise<void>;
  /** Puts an answer in place that came by another way. */
  set: (answer: T) => void;
}

/**
 * Fetching with its states: `const spots = useLoad((signal) => request(listSpots, { params, signal }))`, then
 * `spots.run()` whenever the question changes. Ends with the scope that made it.
 */
export function useLoad<T>(ask: (signal: AbortSignal) => Promise<T>): Load<T> {
  const state = ref<LoadState>('idle');
  const data = shallowRef<T | null>(null);
  const problem = shallowRef<ApiProblem | null>(null);
  let current: AbortController | null = null;

  function set(answer: T): void {
    data.value = answer;
    problem.value = null;
    state.value = 'ready';
  }

  async function run(): Promise<void> {
    current?.abort();
    const mine = new AbortController();
    current = mine;
    state.value = 'loading';
    try {
      const answer = await ask(mine.signal);
      if (current === mine) set(answer);
    } catch (error) {
      // An older question's failure must not cover the newer one's answer.
      if (current !== mine || isAbort(error)) return;
      problem.value = asProblem(error);
      state.value = 'failed';
    }
  }

  onScopeDispose(() => {
    current?.abort();
    current = null;
  });
  return { state, data, problem, run, set };
}
