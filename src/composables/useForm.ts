import { reactive, ref, shallowRef, toValue } from 'vue';
import type { MaybeRefOrGetter, Ref, ShallowRef } from 'vue';
import type { ZodType } from 'zod';
import { asProblem } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';

export interface Form<Values extends object> {
  values: Values;
  /** The sentence for each field, by path; from the contract before sending, from the server after. */
  errors: ShallowRef<Record<string, string>>;
  /** A failure that belongs to no field. */
  problem: ShallowRef<ApiProblem | null>;
  isSending: Ref<boolean>;
  /**
   * Checks the values against the contract's body and sends them. True when it worked; a failure is shown through
   * `errors` and `problem` and loses nothing that was typed.
   */
  submit: (send: (values: Values) => Promise<void>) => Promise<boolean>;
}

/** A form over a contract's body: the same rule speaks in the browser and on the server. */
export function useForm<Values extends object>(
  schema: MaybeRefOrGetter<ZodType>,
  initial: Values,
): Form<Values> {
  const values = reactive({ ...initial }) as Values;
  const errors = shallowRef<Record<string, string>>({});
  const problem = shallowRef<ApiProblem | null>(null);
  const isSending = ref(false);

  async function submit(send: (values: Values) => Promise<void>): Promise<boolean> {
    if (isSending.value) return false;
    problem.value = null;
    const checked = toValue(schema).safeParse(values);
    errors.value = checked.success ? {} : firstByPath(checked.error.issues);
    if (!checked.success) return false;
    isSending.value = true;
    try {
      await send(values);
      return true;
    } catch (error) {
      const failed = asProblem(error);
      errors.value = failed.fieldErrors;
      problem.value = failed;
      return false;
    } finally {
      isSending.value = false;
    }
  }
  return { values, errors, problem, isSending, submit };
}

export function firstByPath(
  issues: readonly { path: PropertyKey[]; message: string }[],
): Record<string, string> {
  const byPath: Record<string, string> = {};
  for (const { path, message } of issues) byPath[path.map(String).join('.')] ??= message;
  return byPath;
}
