import { shallowRef } from 'vue';
import type { Ref, ShallowRef } from 'vue';
import { asProblem } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import { useSessionStore } from '../stores/session.ts';
import { useTheme } from './useTheme.ts';
import type { ThemeChoice } from './useTheme.ts';

/** The theme as a person's own setting: changes the screen at once and is kept with their profile. */
export function useThemeChoice(): {
  choice: Readonly<Ref<ThemeChoice>>;
  chooseTheme: (next: ThemeChoice) => Promise<void>;
  /** Why the choice holds in this browser only. */
  themeProblem: ShallowRef<ApiProblem | null>;
} {
  const session = useSessionStore();
  const { choice, choose } = useTheme();
  const themeProblem = shallowRef<ApiProblem | null>(null);

  async function chooseTheme(next: ThemeChoice): Promise<void> {
    choose(next);
    themeProblem.value = null;
    try {
      await session.saveProfile({ theme: next });
    } catch (error) {
      themeProblem.value = asProblem(error);
    }
  }
  return { choice, chooseTheme, themeProblem };
}
