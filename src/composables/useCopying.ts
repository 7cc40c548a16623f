import { nextTick, ref } from 'vue';
import type { Ref } from 'vue';

export interface Copying {
  /** What became of it, for the screen and for screen readers. */
  said: Ref<string>;
  /** Copies a text. `select` marks it where the browser gives no clipboard, so that the person can copy it. */
  copy: (text: string, select: () => void) => Promise<void>;
}

/** Copying to the clipboard, with a way out where there is none: browsers give none to plain HTTP. */
export function useCopying(): Copying {
  const said = ref('');

  async function copy(text: string, select: () => void): Promise<void> {
    try {
      await navigator.clipboard.writeText(text);
      said.value = 'Copied.';
    } catch {
      await nextTick();
      select();
      said.value = 'Selected: copy it with your keyboard.';
    }
  }
  return { said, copy };
}
