import { ref, shallowRef } from 'vue';
import { defineStore } from 'pinia';
import { readTonight } from '../../shared/contracts/tonight.ts';
import type { LivePair, TonightAnswer } from '../../shared/contracts/tonight.ts';
import { request } from '../api/client.ts';
import { asProblem, isAbort } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import type { LoadState } from '../composables/useLoad.ts';

/** Pairs kept of each band: a wall screen runs for weeks. */
export const pairsKept = 60;

export function pairKey(pair: LivePair): string {
  return `${pair.at} ${pair.call} ${pair.bandMetres} ${pair.receiverA} ${pair.receiverB}`;
}

/** Newest first, each once, at most `pairsKept` of a band: a busy band must not push a quiet one out. */
export function mergePairs(known: readonly LivePair[], fresh: readonly LivePair[]): LivePair[] {
  const byKey = new Map([...known, ...fresh].map((pair) => [pairKey(pair), pair]));
  const sorted = [...byKey.values()].sort((one, other) => Date.parse(other.at) - Date.parse(one.at));
  const perBand = new Map<number, number>();
  return sorted.filter(({ bandMetres }) => {
    const count = (perBand.get(bandMetres) ?? 0) + 1;
    perBand.set(bandMetres, count);
    return count <= pairsKept;
  });
}

/** What the server says of this hour, and the paired stations as they arrive. */
export const useTonightStore = defineStore('tonight', () => {
  const state = ref<LoadState>('idle');
  const problem = shallowRef<ApiProblem | null>(null);
  const answer = shallowRef<TonightAnswer | null>(null);
  const pairs = shallowRef<LivePair[]>([]);
  let stationId: number | null = null;
  let asking: AbortController | null = null;

  function leave(): void {
    asking?.abort();
    asking = null;
    stationId = null;
    state.value = 'idle';
    problem.value = null;
    answer.value = null;
    pairs.value = [];
  }

  /** Never rejects. The last answer stays while the next is on its way, and when that fails. */
  async function load(id: number, inUse: number | null): Promise<void> {
    if (stationId !== id) leave();
    stationId = id;
    asking?.abort();
    const mine = new AbortController();
    asking = mine;
    state.value = 'loading';
    try {
      const next = await request(readTonight, {
        params: { stationId: id },
        query: inUse === null ? {} : { inUse },
        signal: mine.signal,
      });
      if (asking !== mine) return;
      answer.value = next;
      pairs.value = mergePairs(pairs.value, next.pairs);
      problem.value = null;
      state.value = 'ready';
    } catch (error) {
      if (asking !== mine || isAbort(error)) return;
      problem.value = asProblem(error);
      state.value = 'failed';
    }
  }

  function append(fresh: readonly LivePair[]): void {
    if (stationId !== null) pairs.value = mergePairs(pairs.value, fresh);
  }

  return { state, problem, answer, pairs, load, append, leave };
});
