import { ref, shallowRef } from 'vue';
import { defineStore } from 'pinia';
import { listFindings } from '../../shared/contracts/finding.ts';
import type { FindingSummary } from '../../shared/contracts/finding.ts';
import { request } from '../api/client.ts';
import { asProblem, isAbort } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import type { LoadState } from '../composables/useLoad.ts';

const pageSize = 50;
/** The most that the server gives at once; for reading to the end. */
const largestPage = 200;

/** The list of frozen findings of one station, newest first, read page by page. */
export const useFindingsStore = defineStore('findings', () => {
  const state = ref<LoadState>('idle');
  const findings = shallowRef<FindingSummary[]>([]);
  /** Where the next page begins; null: all are here. */
  const next = ref<string | null>(null);
  const readingOn = ref(false);
  const problem = shallowRef<ApiProblem | null>(null);
  let stationId: number | null = null;
  let current: AbortController | null = null;

  /** Reads the first page anew. Never rejects: a failure becomes the state. */
  async function load(id: number): Promise<void> {
    if (stationId !== id) {
      findings.value = [];
      next.value = null;
    }
    stationId = id;
    current?.abort();
    const mine = new AbortController();
    current = mine;
    readingOn.value = false;
    state.value = 'loading';
    await read(id, { limit: pageSize }, mine, []);
  }

  /** The next page. Never rejects; does nothing when all are here. */
  async function loadMore(limit = pageSize): Promise<void> {
    const after = next.value;
    if (stationId === null || current === null || after === null || readingOn.value) return;
    readingOn.value = true;
    await read(stationId, { limit, after }, current, findings.value);
    readingOn.value = false;
  }

  /** To the last page: for whoever looks for something among all. */
  async function loadAll(id: number): Promise<void> {
    await load(id);
    await loadRest();
  }

  async function loadRest(): Promise<void> {
    while (next.value !== null && state.value === 'ready' && !readingOn.value) await loadMore(largestPage);
  }

  async function read(
    id: number,
    query: { limit: number; after?: string },
    mine: AbortController,
    before: readonly FindingSummary[],
  ): Promise<void> {
    try {
      const page = await request(listFindings, { params: { stationId: id }, query, signal: mine.signal });
      if (current !== mine) return;
      findings.value = [...before, ...page.items];
      next.value = page.next;
      problem.value = null;
      state.value = 'ready';
    } catch (error) {
      if (current !== mine || isAbort(error)) return;
      problem.value = asProblem(error);
      state.value = 'failed';
    }
  }

  return { state, findings, next, readingOn, problem, load, loadMore, loadAll, loadRest };
});
