import { ref, shallowRef } from 'vue';
import { defineStore } from 'pinia';
import { listSpots } from '../../shared/contracts/spot.ts';
import type { SpotRow } from '../../shared/contracts/spot.ts';
import { request } from '../api/client.ts';
import { asProblem, isAbort } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import { filterQuery, spotKey } from '../components/spots/spot-filter.ts';
import type { SpotFilter } from '../components/spots/spot-filter.ts';
import type { LoadState } from '../composables/useLoad.ts';

const pageRows = 100;
/** The server looks for about a second and may come back with nothing; so often it is asked to go on unbidden. */
const mostEmptyPages = 4;
/** Live rows push in at the top; beyond this the list begins anew, so that a night of it does not fill the memory. */
const mostLiveRows = 2000;

/** The spots under one filter, newest first, read on by keyset. */
export const useSpotsStore = defineStore('spots', () => {
  const state = ref<LoadState>('idle');
  const rows = shallowRef<SpotRow[]>([]);
  const next = ref<string | null>(null);
  const problem = shallowRef<ApiProblem | null>(null);
  const loadingMore = ref(false);
  /** When the newest spots were last asked for, and how many of them were new. */
  const refreshedAt = ref<number | null>(null);
  const lastNew = ref(0);
  let asked: { stationId: number; filter: SpotFilter } | null = null;
  let current: AbortController | null = null;

  /** Asks under a filter; an older question is taken back. Never rejects: a failure becomes the state. */
  async function load(stationId: number, filter: SpotFilter): Promise<void> {
    if (asked !== null && asked.stationId !== stationId) {
      rows.value = [];
      next.value = null;
    }
    asked = { stationId, filter };
    current?.abort();
    const mine = new AbortController();
    current = mine;
    state.value = 'loading';
    loadingMore.value = false;
    try {
      const page = await readOn(undefined, mine.signal);
      if (current !== mine) return;
      rows.value = page.items;
      next.value = page.next;
      settle();
    } catch (error) {
      if (current === mine && !isAbort(error)) fail(error);
    }
  }

  /** Reads on where the rows end. */
  async function more(): Promise<void> {
    const mine = current;
    if (mine === null || next.value === null || loadingMore.value) return;
    loadingMore.value = true;
    try {
      const page = await readOn(next.value, mine.signal);
      if (current !== mine) return;
      rows.value = [...rows.value, ...page.items];
      next.value = page.next;
      settle();
    } catch (error) {
      if (current === mine && !isAbort(error)) fail(error);
    } finally {
      if (current === mine) loadingMore.value = false;
    }
  }

  /**
   * The newest spots, put on top of those that are shown. Where more came than a page holds, the rows begin anew:
   * a list with an unseen hole in it would be read as complete. Failures are left to the next turn.
   */
  async function refresh(): Promise<void> {
    const mine = current;
    if (mine === null || asked === null || state.value === 'loading' || loadingMore.value) return;
    try {
      const page = await readOn(undefined, mine.signal);
      if (current !== mine) return;
      const known = new Set(rows.value.map(spotKey));
      const fresh = page.items.filter((row) => !known.has(spotKey(row)));
      const isJoined = fresh.length < page.items.length || page.items.length === 0;
      if (!isJoined || rows.value.length + fresh.length > mostLiveRows) {
        rows.value = page.items;
        next.value = page.next;
      } else if (fresh.length > 0) {
        rows.value = [...fresh, ...rows.value].sort((one, other) => other.heardAt.localeCompare(one.heardAt));
      }
      lastNew.value = fresh.length;
      settle();
    } catch (error) {
      if (current === mine && !isAbort(error)) fail(error);
    }
  }

  async function readOn(
    after: string | undefined,
    signal: AbortSignal,
  ): Promise<{ items: SpotRow[]; next: string | null }> {
    const { stationId, filter } = asked!;
    let cursor = after;
    for (let turn = 0; ; turn += 1) {
      const page = await request(listSpots, {
        params: { stationId },
        query: { ...filterQuery(filter), after: cursor, limit: pageRows },
        signal,
      });
      if (page.items.length > 0 || page.next === null || turn === mostEmptyPages) return page;
      cursor = page.next;
    }
  }

  function settle(): void {
    refreshedAt.value = Date.now();
    problem.value = null;
    state.value = 'ready';
  }

  function fail(error: unknown): void {
    problem.value = asProblem(error);
    state.value = 'failed';
  }

  /** Takes back what is on its way: the page was left. */
  function leave(): void {
    current?.abort();
    current = null;
    loadingMore.value = false;
    if (state.value === 'loading') state.value = rows.value.length > 0 ? 'ready' : 'idle';
  }

  return { state, rows, next, problem, loadingMore, refreshedAt, lastNew, load, more, refresh, leave };
});
