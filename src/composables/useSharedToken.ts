import type { Ref } from 'vue';
import { useHashToken } from './useHashToken.ts';

/**
 * The token of a guest's link. A guest has nothing but the link, and a phone throws pages away that are not looked
 * at: so the token also lives in the state of this one history entry, which a reload keeps and no address shows.
 */
export function useSharedToken(): Ref<string | null> {
  const token = useHashToken();
  const state = history.state as { sharedToken?: unknown } | null;
  if (token.value !== null) history.replaceState({ ...state, sharedToken: token.value }, '');
  else if (typeof state?.sharedToken === 'string') token.value = state.sharedToken;
  return token;
}
