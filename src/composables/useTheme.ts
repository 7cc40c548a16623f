import { computed, effectScope, readonly, ref, shallowRef, watchEffect } from 'vue';
import type { ComputedRef, Ref } from 'vue';

/** What a person chooses; `system` follows the device. */
export type ThemeChoice = 'system' | 'dark' | 'light';
/** What is on the screen; night vision lies over the choice while it is switched on. */
export type Theme = 'dark' | 'light' | 'night';

const rememberedAs = 'whichwire.theme';
const choice = ref<ThemeChoice>('system');
const nightVision = ref(false);
const deviceIsLight = shallowRef(false);
const theme = computed<Theme>(() => {
  if (nightVision.value) return 'night';
  if (choice.value === 'system') return deviceIsLight.value ? 'light' : 'dark';
  return choice.value;
});

/** Applies the remembered theme and keeps the page in step with it; called once, before the first paint. */
export function startTheme(): void {
  const device = window.matchMedia('(prefers-color-scheme: light)');
  deviceIsLight.value = device.matches;
  device.addEventListener('change', (event) => (deviceIsLight.value = event.matches));
  choice.value = remembered();
  effectScope(true).run(() => {
    watchEffect(() => (document.documentElement.dataset.theme = theme.value), { flush: 'sync' });
  });
}

function remembered(): ThemeChoice {
  try {
    const text = localStorage.getItem(rememberedAs);
    return text === 'dark' || text === 'light' ? text : 'system';
  } catch {
    // A browser that forbids storage still gets a theme, only not the same one next time.
    return 'system';
  }
}

export interface ThemeControl {
  choice: Readonly<Ref<ThemeChoice>>;
  theme: ComputedRef<Theme>;
  nightVision: Ref<boolean>;
  choose: (next: ThemeChoice) => void;
}

export function useTheme(): ThemeControl {
  return {
    choice: readonly(choice),
    theme,
    nightVision,
    choose(next) {
      choice.value = next;
      try {
        localStorage.setItem(rememberedAs, next);
      } catch {
        // See `remembered`.
      }
    },
  };
}
