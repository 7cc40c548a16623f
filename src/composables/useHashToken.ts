import { ref } from 'vue';
import type { Ref } from 'vue';
import { useRoute, useRouter } from 'vue-router';

/**
 * A one-time token from behind the # of the address, where no server's log sees it. It is taken out of the address
 * at once, so that neither history nor a shared screen keeps it.
 */
export function useHashToken(): Ref<string | null> {
  const route = useRoute();
  const router = useRouter();
  const token = ref<string | null>(route.hash.slice(1) || null);
  if (token.value !== null) void router.replace({ path: route.path, query: route.query });
  return token;
}
