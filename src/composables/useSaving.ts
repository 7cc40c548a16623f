import { ref, shallowRef } from 'vue';
import type { Ref, ShallowRef } from 'vue';
import type { ZodType } from 'zod';
import { asProblem } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import { firstByPath } from './useForm.ts';

export interface Saving {
  /** The sentence for each field, by path: from the contract before sending, from the server after. */
  errors: ShallowRef<Record<string, string>>;
  problem: ShallowRef<ApiProblem | null>;
  busy: Ref<boolean>;
  /** Checks a body against its contract and sends it. True when it worked; a failure is shown, never thrown. */
  save: (schema: ZodType, body: unknown, send: () => Promise<unknown>) => Promise<boolean>;
  /** For a form that opens: what was wrong with the former one is not wrong with this one. */
  reset: () => void;
}

/** Sends what a form whose fields are not the body's (other units, texts for numbers) was turned into. */
export function useSaving(): Saving {
  const errors = shallowRef<Record<string, string>>({});
  const problem = shallowRef<ApiProblem | null>(null);
  const busy = ref(false);

  function reset(): void {
    errors.value = {};
    problem.value = null;
  }

  async function save(schema: ZodType, body: unknown, send: () => Promise<unknown>): Promise<boolean> {
    if (busy.value) return false;
    reset();
    const checked = schema.safeParse(body);
    if (!checked.success) {
      errors.value = firstByPath(checked.error.issues);
      return false;
    }
    busy.value = true;
    try {
      await send();
      return true;
    } catch (error) {
      const failed = asProblem(error);
      errors.value = failed.fieldErrors;
      problem.value = failed;
      return false;
    } finally {
      busy.value = false;
    }
  }
  return { errors, problem, busy, save, reset };
}
