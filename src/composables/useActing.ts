import { shallowRef } from 'vue';
import type { ShallowRef } from 'vue';
import { asProblem } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';

export interface Acting<What extends string> {
  /** What is being done; null: nothing. */
  busy: ShallowRef<What | null>;
  /** Why the last act failed. */
  problem: ShallowRef<ApiProblem | null>;
  /** Does one thing at a time. True when it worked; a failure becomes `problem`, or goes to `onFailed` instead. */
  act: (
    what: What,
    work: () => Promise<unknown>,
    onFailed?: (failed: ApiProblem) => void,
  ) => Promise<boolean>;
}

/** What a person does on a page, one thing at a time, with what went wrong. */
export function useActing<What extends string>(): Acting<What> {
  const busy: ShallowRef<What | null> = shallowRef(null);
  const problem = shallowRef<ApiProblem | null>(null);

  async function act(
    what: What,
    work: () => Promise<unknown>,
    onFailed: (failed: ApiProblem) => void = (failed) => (problem.value = failed),
  ): Promise<boolean> {
    if (busy.value !== null) return false;
    busy.value = what;
    problem.value = null;
    try {
      await work();
      return true;
    } catch (error) {
      onFailed(asProblem(error));
      return false;
    } finally {
      busy.value = null;
    }
  }

  return { busy, problem, act };
}
