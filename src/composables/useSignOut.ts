import { ref } from 'vue';
import type { Ref } from 'vue';
import { useRouter } from 'vue-router';
import { asProblem } from '../api/problem.ts';
import { useSessionStore } from '../stores/session.ts';

/** Ends the session and shows the door; `signOutProblem` says why it did not work. */
export function useSignOut(): { signOut: () => Promise<void>; signOutProblem: Ref<string | null> } {
  const router = useRouter();
  const session = useSessionStore();
  const signOutProblem = ref<string | null>(null);

  async function signOut(): Promise<void> {
    signOutProblem.value = null;
    try {
      await session.leave();
    } catch (error) {
      signOutProblem.value = `You are still signed in. ${asProblem(error).message}`;
      return;
    }
    await router.push({ name: 'sign-in' });
  }
  return { signOut, signOutProblem };
}
