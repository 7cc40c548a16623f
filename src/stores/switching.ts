import { ref, shallowRef } from 'vue';
import { defineStore } from 'pinia';
import {
  applyDwellChanges,
  exportDwells,
  listDwellHistory,
  listDwells,
  previewDwellChanges,
  switchReceiver,
  undoDwellChange,
} from '../../shared/contracts/dwell.ts';
import type { Dwell, DwellChange, DwellPreview, dwellHistoryEntry } from '../../shared/contracts/dwell.ts';
import type { ReplyOf } from '../../shared/contracts/endpoint.ts';
import type { z } from 'zod';
import { download, request } from '../api/client.ts';
import { ApiProblem, asProblem, isAbort } from '../api/problem.ts';
import type { LoadState } from '../composables/useLoad.ts';

export type HistoryEntry = z.infer<typeof dwellHistoryEntry>;
interface Stretch {
  fromMs: number;
  toMs: number;
}

const dayMs = 86_400_000;
const iso = (timeMs: number) => new Date(timeMs).toISOString();

/** The stretch of the switch log that is in sight, its history, and what may be done to it. */
export const useSwitchingStore = defineStore('switching', () => {
  const state = ref<LoadState>('idle');
  const problem = shallowRef<ApiProblem | null>(null);
  const dwells = shallowRef<Dwell[]>([]);
  /** The server had more dwells than it sends at once: the end of the stretch is missing. */
  const truncated = ref(false);
  /** What `dwells` covers; null before the first answer. */
  const loaded = shallowRef<Stretch | null>(null);
  const historyState = ref<LoadState>('idle');
  const historyProblem = shallowRef<ApiProblem | null>(null);
  const history = shallowRef<HistoryEntry[]>([]);
  const historyNext = ref<string | null>(null);
  let stationId: number | null = null;
  let asking: AbortController | null = null;
  let wanted: Stretch | null = null;

  function leave(): void {
    asking?.abort();
    asking = null;
    wanted = null;
    stationId = null;
    state.value = 'idle';
    problem.value = null;
    dwells.value = [];
    truncated.value = false;
    loaded.value = null;
    historyState.value = 'idle';
    historyProblem.value = null;
    history.value = [];
    historyNext.value = null;
  }

  /**
   * Makes sure of the dwells of a stretch. Half of it on either side comes along, so that moving the time line does
   * not ask at each step. Never rejects.
   */
  async function show(id: number, stretch: Stretch): Promise<void> {
    if (stationId !== id) {
      leave();
      stationId = id;
    }
    const covers = (has: Stretch | null) =>
      has !== null && has.fromMs <= stretch.fromMs && has.toMs >= stretch.toMs;
    if (state.value === 'loading' ? covers(wanted) : covers(loaded.value) && !truncated.value) return;
    const half = (stretch.toMs - stretch.fromMs) / 2;
    wanted = { fromMs: stretch.fromMs - half, toMs: stretch.toMs + half };
    await load();
  }

  /** Asks again for what is in sight: after a change of the log. Never rejects. */
  async function reload(): Promise<void> {
    if (wanted !== null) await load();
  }

  async function load(): Promise<void> {
    const [id, stretch] = [stationId!, wanted!];
    asking?.abort();
    const mine = new AbortController();
    asking = mine;
    state.value = 'loading';
    try {
      const answer = await request(listDwells, {
        params: { stationId: id },
        query: { from: iso(stretch.fromMs), to: iso(stretch.toMs) },
        signal: mine.signal,
      });
      if (asking !== mine) return;
      dwells.value = answer.items;
      truncated.value = answer.truncated;
      loaded.value = stretch;
      problem.value = null;
      state.value = 'ready';
    } catch (error) {
      if (asking !== mine || isAbort(error)) return;
      problem.value = asProblem(error);
      state.value = 'failed';
    }
  }

  /** The newest changes; `more` reads on where the list ends. Never rejects. */
  async function loadHistory(id: number, more = false): Promise<void> {
    historyState.value = 'loading';
    const after = more ? (historyNext.value ?? undefined) : undefined;
    try {
      const { items, next } = await request(listDwellHistory, {
        params: { stationId: id },
        query: { limit: 20, ...(after === undefined ? {} : { after }) },
      });
      if (stationId !== id) return;
      history.value = more ? [...history.value, ...items] : items;
      historyNext.value = next;
      historyProblem.value = null;
      historyState.value = 'ready';
    } catch (error) {
      if (stationId !== id) return;
      historyProblem.value = asProblem(error);
      historyState.value = 'failed';
    }
  }

  async function afterChange(id: number): Promise<void> {
    if (stationId === id) await Promise.all([reload(), loadHistory(id)]);
  }

  /** Logs "now on ...", or with `at` a switch that happened earlier. @throws ApiProblem */
  async function switchTo(
    id: number,
    receiverId: number,
    antennaId: number | null,
    at?: string,
  ): Promise<ReplyOf<typeof switchReceiver>> {
    const reply = await request(switchReceiver, {
      params: { stationId: id },
      body: { receiver: receiverId, antenna: antennaId, ...(at === undefined ? {} : { at }) },
    });
    void afterChange(id);
    return reply;
  }

  /**
   * Takes back the receiver's last switch: what it was on before is on again, as if the button had not been
   * pressed. `logged`: the dwell that the switch opened, null when it disconnected the receiver. The log is read
   * first: a controller or another person may have switched since.
   * @throws ApiProblem
   */
  async function undoSwitch(id: number, receiverId: number, logged: Dwell | null): Promise<void> {
    const nearMs = logged === null ? Date.now() : Date.parse(logged.startsAt);
    const { items } = await request(listDwells, {
      params: { stationId: id },
      query: { from: iso(nearMs - dayMs), to: iso(Date.now() + dayMs), receiverId },
    });
    const newest = items.at(-1);
    const asLeft =
      logged === null ? newest?.endsAt !== null : newest?.id === logged.id && newest.endsAt === null;
    if (!newest || !asLeft) {
      throw new ApiProblem(
        'The receiver has been switched again since. Take the change back under History, or correct the log.',
        { status: 409, code: 'switched-since' },
      );
    }
    const former = logged === null ? newest : items.find((dwell) => dwell.endsAt === logged.startsAt);
    const changes: DwellChange[] = [];
    if (logged !== null) changes.push({ action: 'delete', dwellId: logged.id });
    if (former) changes.push({ action: 'edit', dwellId: former.id, endsAt: null });
    await apply(id, changes);
  }

  /** @throws ApiProblem: an overlap, a time out of place, with the path of the change. */
  function preview(id: number, changes: DwellChange[], signal?: AbortSignal): Promise<DwellPreview> {
    return request(previewDwellChanges, { params: { stationId: id }, body: { changes }, signal });
  }

  /** @throws ApiProblem */
  async function apply(id: number, changes: DwellChange[]): Promise<ReplyOf<typeof applyDwellChanges>> {
    const reply = await request(applyDwellChanges, { params: { stationId: id }, body: { changes } });
    void afterChange(id);
    return reply;
  }

  /** @throws ApiProblem: a later change touches the same dwells. */
  async function undo(id: number, batchId: string): Promise<DwellPreview> {
    const reply = await request(undoDwellChange, { params: { stationId: id, batchId } });
    void afterChange(id);
    return reply.preview;
  }

  /** @throws ApiProblem */
  function csv(id: number, stretch: Stretch | null): Promise<{ blob: Blob; fileName: string | null }> {
    const query = stretch === null ? {} : { from: iso(stretch.fromMs), to: iso(stretch.toMs) };
    return download(exportDwells, { params: { stationId: id }, query });
  }

  return {
    ...{ state, problem, dwells, truncated, loaded },
    ...{ historyState, historyProblem, history, historyNext },
    ...{ show, reload, loadHistory, switchTo, undoSwitch, preview, apply, undo, csv, leave },
  };
});
