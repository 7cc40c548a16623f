import { nextTick, readonly, ref } from 'vue';
import type { Ref } from 'vue';

const message = ref('');

/**
 * Words for screen readers about what changed without a change of page ("412 spots found"). App.vue holds the one
 * live region that speaks them.
 */
export function useAnnouncer(): { message: Readonly<Ref<string>>; announce: (words: string) => void } {
  return {
    message: readonly(message),
    announce(words) {
      // Emptied first: the same words twice in a row would otherwise be no change and stay unspoken.
      message.value = '';
      void nextTick(() => (message.value = words));
    },
  };
}
