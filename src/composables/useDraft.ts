import { reactive, ref, watch } from 'vue';
import type { Ref } from 'vue';

export interface Draft<Values extends object> {
  values: Values;
  /** Set while the values are those of an earlier visit, not the ones that are stored. */
  isRestored: Ref<boolean>;
  /** After it was saved, or when the person lets it go: the next visit starts from what is stored. */
  forget: () => void;
  /** Puts what is stored back into the fields. */
  discard: () => void;
}

const prefix = 'whichwire.draft.';

/**
 * The fields of a form, kept in this tab until they are saved: closing the form, leaving the page or loading it
 * anew loses nothing. `key` names the thing that is edited, with its station. Secrets must not go through here.
 */
export function useDraft<Values extends object>(key: string, stored: Values): Draft<Values> {
  const place = prefix + key;
  const kept = read(place);
  const values = reactive({ ...stored, ...kept }) as Values;
  const isRestored = ref(kept !== null && !same(values, stored));
  let isOver = false;

  watch(
    values,
    () => {
      if (isOver) return;
      if (same(values, stored)) remove(place);
      else write(place, values);
    },
    { deep: true, flush: 'sync' },
  );

  function forget(): void {
    isOver = true;
    remove(place);
  }
  function discard(): void {
    Object.assign(values, stored);
    isRestored.value = false;
  }
  return { values, isRestored, forget, discard };
}

function same(one: object, other: object): boolean {
  return JSON.stringify(one) === JSON.stringify(other);
}

// Where storage is forbidden or full a draft lives as long as its form: nothing else depends on it.
function read(place: string): Record<string, unknown> | null {
  try {
    const kept: unknown = JSON.parse(sessionStorage.getItem(place) ?? 'null');
    return typeof kept === 'object' && kept !== null ? (kept as Record<string, unknown>) : null;
  } catch {
    return null;
  }
}
function write(place: string, values: object): void {
  try {
    sessionStorage.setItem(place, JSON.stringify(values));
  } catch {
    // See above.
  }
}
function remove(place: string): void {
  try {
    sessionStorage.removeItem(place);
  } catch {
    // See above.
  }
}
