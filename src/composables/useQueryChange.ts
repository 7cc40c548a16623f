import { useRoute, useRouter } from 'vue-router';

/** Changes parts of the address's query in place and leaves the rest: undefined takes a part away, null leaves its bare name. */
export function useQueryChange(): (change: Record<string, string | null | undefined>) => void {
  const route = useRoute();
  const router = useRouter();
  return (change) => {
    const query = Object.fromEntries(
      Object.entries({ ...route.query, ...change }).filter(([, value]) => value !== undefined),
    );
    void router.replace({ query });
  };
}
