import { computed, ref, watch } from 'vue';
import type { ComputedRef, Ref } from 'vue';
import { useRoute, useRouter } from 'vue-router';
import { decodeLadder, encodeLadder, sameLadder } from '../../shared/contracts/ladder-url.ts';
import type { LadderQuestion } from '../../shared/contracts/ladder.ts';

export interface AskedLadder {
  /** The question as the address tells it. */
  question: ComputedRef<LadderQuestion>;
  /** The two antennas whose card the address opens. */
  pair: ComputedRef<readonly [number, number] | null>;
  /** What the address said wrongly; kept while it is mended, until the next question is asked by hand. */
  problems: Ref<string[]>;
  ask: (next: LadderQuestion) => void;
  /** Opens the card of a pair, or closes it. */
  openPair: (pair: readonly [number, number] | null) => void;
}

/** The question of the Ladder page and its open pair: both live in the address, so that a link is the screen. */
export function useAskedLadder(): AskedLadder {
  const route = useRoute();
  const router = useRouter();

  const decoded = computed(() => decodeLadder(route.query, ['wall']));
  const question = computed(() => decoded.value.question);
  const pair = computed(() => decoded.value.pair);
  const problems = ref<string[]>([]);
  watch(
    decoded,
    (next) => {
      if (next.problems.length > 0) problems.value = next.problems;
    },
    { immediate: true },
  );

  function queryOf(next: LadderQuestion, nextPair: readonly [number, number] | null): Record<string, string> {
    const { wall } = route.query;
    return {
      ...encodeLadder({ question: next, pair: nextPair }),
      ...(typeof wall === 'string' ? { wall } : {}),
    };
  }

  function ask(next: LadderQuestion): void {
    problems.value = [];
    if (!sameLadder(next, question.value)) void router.push({ query: queryOf(next, pair.value) });
  }

  // Looking at another pair asks nothing new: going back should leave the question, not walk through the pairs.
  function openPair(next: readonly [number, number] | null): void {
    void router.replace({ query: queryOf(question.value, next) });
  }

  return { question, pair, problems, ask, openPair };
}
