import { computed, ref, shallowRef } from 'vue';
import { defineStore } from 'pinia';
import {
  acceptInvitation,
  readProfile,
  setUp,
  signIn,
  signOut,
  updateProfile,
} from '../../shared/contracts/auth.ts';
import type { Profile, SignedIn } from '../../shared/contracts/auth.ts';
import type { BodyInput } from '../../shared/contracts/endpoint.ts';
import { dropAccess, onSignedIn, onSignedOut, refreshAccess, takeAccess } from '../api/access.ts';
import { request } from '../api/client.ts';
import { asProblem } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import type { LoadState } from '../composables/useLoad.ts';
import { useTheme } from '../composables/useTheme.ts';

const notedAs = 'whichwire.session';

/**
 * Whether this browser had a session, and nothing more: it saves a stranger's first page a request that is bound to
 * be refused. Where storage is forbidden the server is always asked.
 */
function mayHaveSession(): boolean {
  try {
    return localStorage.getItem(notedAs) !== null;
  } catch {
    return true;
  }
}

function noteSession(isThere: boolean): void {
  try {
    if (isThere) localStorage.setItem(notedAs, 'yes');
    else localStorage.removeItem(notedAs);
  } catch {
    // See `mayHaveSession`.
  }
}

/**
 * Who sits here. `state` tells whether that is known yet; once it is `ready`, `profile` is null when nobody is
 * signed in. The access token is not in this store (see api/access.ts).
 */
export const useSessionStore = defineStore('session', () => {
  const state = ref<LoadState>('idle');
  const profile = shallowRef<Profile | null>(null);
  const problem = shallowRef<ApiProblem | null>(null);
  /** Set when a session ended by itself, so that the sign-in page can say why it is shown. */
  const endedUnasked = ref(false);
  const theme = useTheme();
  let restoring: Promise<void> | null = null;

  const isSignedIn = computed(() => profile.value !== null);
  const lengthUnit = computed(() => profile.value?.lengthUnit ?? 'm');

  onSignedIn((signedIn) => take(signedIn.profile));
  onSignedOut(() => {
    noteSession(false);
    profile.value = null;
    endedUnasked.value = true;
  });

  function take(next: Profile): void {
    noteSession(true);
    profile.value = next;
    problem.value = null;
    endedUnasked.value = false;
    state.value = 'ready';
    theme.choose(next.theme);
  }

  /** Asks once, at the start of the page, whether the refresh cookie still holds. Never rejects. */
  function restore(): Promise<void> {
    if (state.value === 'ready') return Promise.resolve();
    restoring ??= askAgain().finally(() => (restoring = null));
    return restoring;
  }

  async function askAgain(): Promise<void> {
    if (!mayHaveSession()) {
      state.value = 'ready';
      return;
    }
    state.value = 'loading';
    try {
      await refreshAccess();
    } catch (error) {
      const failed = asProblem(error);
      if (failed.status === 401 || failed.status === 403) {
        noteSession(false);
        state.value = 'ready';
      } else {
        problem.value = failed;
        state.value = 'failed';
      }
    }
  }

  async function enter(answer: Promise<SignedIn>): Promise<void> {
    takeAccess(await answer);
  }

  /** Rejects with an ApiProblem to show in the form. So do `accept` and `makeStation`. */
  function signInWith(email: string, password: string): Promise<void> {
    return enter(request(signIn, { body: { email, password } }));
  }
  function accept(body: BodyInput<typeof acceptInvitation>): Promise<void> {
    return enter(request(acceptInvitation, { body }));
  }
  function makeStation(body: BodyInput<typeof setUp>): Promise<void> {
    return enter(request(setUp, { body }));
  }

  /**
   * Ends the session. Rejects, still signed in, when the server could not be told: the cookie would bring the
   * session back on the next visit, and a person who leaves a shared computer must know that.
   */
  async function leave(): Promise<void> {
    await request(signOut);
    dropAccess();
    noteSession(false);
    profile.value = null;
    endedUnasked.value = false;
  }

  async function saveProfile(body: BodyInput<typeof updateProfile>): Promise<void> {
    take(await request(updateProfile, { body }));
  }

  /** After something that changes memberships (a station made, an invitation taken). */
  async function reloadProfile(): Promise<void> {
    take(await request(readProfile));
  }

  return {
    state,
    profile,
    problem,
    endedUnasked,
    isSignedIn,
    lengthUnit,
    restore,
    signInWith,
    accept,
    makeStation,
    leave,
    saveProfile,
    reloadProfile,
  };
});
