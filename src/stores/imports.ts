import { computed, ref, shallowReactive, shallowRef, watch } from 'vue';
import { defineStore } from 'pinia';
import {
  cancelImport,
  importMapping,
  listImports,
  readImport,
  startImport,
  undoImport,
  uploadImport,
} from '../../shared/contracts/import.ts';
import type { ImportKind, ImportMapping, ImportRecord } from '../../shared/contracts/import.ts';
import { request, upload } from '../api/client.ts';
import { asProblem, isAbort } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import type { LoadState } from '../composables/useLoad.ts';

/** A file on its way to the server; it goes on while other pages are looked at. */
export interface Upload {
  key: number;
  stationId: number;
  kind: ImportKind;
  file: File;
  sentBytes: number;
  state: 'waiting' | 'sending' | 'failed';
  problem: ApiProblem | null;
  stop: AbortController;
}

/** States in which the server is at work on an import. */
export const atWork: readonly ImportRecord['state'][] = ['uploading', 'queued', 'running'];

const draftKey = (stationId: number, importId: number) => `whichwire.mapping.${stationId}.${importId}`;

function warnOfLoss(event: BeforeUnloadEvent): void {
  event.preventDefault();
}

/** Imports of one station, newest first, the files on their way, and mappings that were not started yet. */
export const useImportsStore = defineStore('imports', () => {
  const state = ref<LoadState>('idle');
  const problem = shallowRef<ApiProblem | null>(null);
  const next = ref<string | null>(null);
  const loadingMore = ref(false);
  const uploads = ref<Upload[]>([]);
  const records = shallowReactive(new Map<number, ImportRecord>());
  /** The lowest id that the list reaches down to; single imports below it may have been read as well. */
  const reachesDownTo = ref(Number.POSITIVE_INFINITY);
  let stationId: number | null = null;
  let lastKey = 0;
  let sending: Promise<unknown> = Promise.resolve();

  const items = computed(() =>
    [...records.values()]
      .filter(({ id }) => id >= reachesDownTo.value)
      .sort((one, other) => other.id - one.id),
  );
  const isAnyAtWork = computed(() => items.value.some((each) => atWork.includes(each.state)));

  // A closed tab would lose what is still on its way, whichever page is looked at.
  watch(
    () => uploads.value.some((each) => each.state !== 'failed'),
    (isSending) => {
      if (isSending) window.addEventListener('beforeunload', warnOfLoss);
      else window.removeEventListener('beforeunload', warnOfLoss);
    },
  );

  function enter(id: number): void {
    if (stationId === id) return;
    stationId = id;
    records.clear();
    next.value = null;
    reachesDownTo.value = Number.POSITIVE_INFINITY;
    state.value = 'idle';
    problem.value = null;
  }

  /** Reads the newest imports. Never rejects: a failure becomes the state. */
  async function load(id: number): Promise<void> {
    enter(id);
    state.value = 'loading';
    await readPage(id, undefined);
  }

  /** Reads on where the list ends. */
  async function more(): Promise<void> {
    if (stationId === null || next.value === null || loadingMore.value) return;
    loadingMore.value = true;
    await readPage(stationId, next.value);
    loadingMore.value = false;
  }

  async function readPage(id: number, after: string | undefined): Promise<void> {
    try {
      const page = await request(listImports, { params: { stationId: id }, query: { after } });
      if (stationId !== id) return;
      for (const record of page.items) records.set(record.id, record);
      const lowest = page.items.at(-1)?.id ?? 0;
      // A newer first page leaves the cursor of a list that was read further down as it is.
      if (lowest < reachesDownTo.value || page.next === null) {
        reachesDownTo.value = Math.min(reachesDownTo.value, page.next === null ? 0 : lowest);
        next.value = page.next;
      }
      problem.value = null;
      state.value = 'ready';
    } catch (error) {
      if (stationId !== id) return;
      problem.value = asProblem(error);
      state.value = 'failed';
    }
  }

  /** One import anew. @throws ApiProblem */
  async function read(id: number, importId: number, signal?: AbortSignal): Promise<ImportRecord> {
    enter(id);
    return put(id, await request(readImport, { params: { stationId: id, importId }, signal }));
  }

  function put(id: number, record: ImportRecord): ImportRecord {
    if (stationId === id) records.set(record.id, record);
    return record;
  }

  /** Reads the whole file under a mapping. @throws ApiProblem whose errors name parts of the mapping */
  async function start(id: number, importId: number, mapping: ImportMapping): Promise<void> {
    put(id, await request(startImport, { params: { stationId: id, importId }, body: { mapping } }));
    forgetDraft(id, importId);
  }

  /** @throws ApiProblem */
  async function cancel(id: number, importId: number): Promise<void> {
    put(id, await request(cancelImport, { params: { stationId: id, importId } }));
  }

  /** @throws ApiProblem */
  async function undo(id: number, importId: number): Promise<void> {
    put(id, await request(undoImport, { params: { stationId: id, importId } }));
  }

  /**
   * Sends a file after those that are on their way. Null when it failed or was stopped; a failure stays in
   * `uploads` with its reason until it is put away or sent again.
   */
  async function send(id: number, kind: ImportKind, file: File): Promise<ImportRecord | null> {
    lastKey += 1;
    const key = lastKey;
    const stop = new AbortController();
    uploads.value.push({
      key,
      stationId: id,
      kind,
      file,
      sentBytes: 0,
      state: 'waiting',
      problem: null,
      stop,
    });
    const turn = sending.then(() => sendNow(key));
    sending = turn;
    return turn;
  }

  async function sendNow(key: number): Promise<ImportRecord | null> {
    const entry = uploads.value.find((each) => each.key === key);
    if (entry === undefined) return null;
    entry.state = 'sending';
    try {
      const record = await upload(uploadImport, {
        params: { stationId: entry.stationId },
        query: { kind: entry.kind },
        file: entry.file,
        signal: entry.stop.signal,
        onProgress: ({ sentBytes }) => (entry.sentBytes = sentBytes),
      });
      putAway(key);
      return put(entry.stationId, record);
    } catch (error) {
      if (isAbort(error)) putAway(key);
      else {
        entry.problem = asProblem(error);
        entry.state = 'failed';
      }
      return null;
    }
  }

  /** Stops a file on its way, or puts a failed one away. */
  function stopUpload(key: number): void {
    uploads.value.find((each) => each.key === key)?.stop.abort();
    putAway(key);
  }

  async function sendAgain(key: number): Promise<ImportRecord | null> {
    const failed = uploads.value.find((each) => each.key === key);
    if (failed === undefined) return null;
    putAway(key);
    return send(failed.stationId, failed.kind, failed.file);
  }

  function putAway(key: number): void {
    uploads.value = uploads.value.filter((each) => each.key !== key);
  }

  /** A mapping that was worked on and not started; it outlives the page and the tab. */
  function draftOf(id: number, importId: number): ImportMapping | null {
    try {
      const text = localStorage.getItem(draftKey(id, importId));
      const parsed = text === null ? null : importMapping.safeParse(JSON.parse(text));
      return parsed?.success ? parsed.data : null;
    } catch {
      // Storage switched off, or text of another release: as good as no draft.
      return null;
    }
  }

  function keepDraft(id: number, importId: number, mapping: ImportMapping): void {
    try {
      localStorage.setItem(draftKey(id, importId), JSON.stringify(mapping));
    } catch {
      // Storage full or switched off: the draft then lasts as long as the page.
    }
  }

  function forgetDraft(id: number, importId: number): void {
    try {
      localStorage.removeItem(draftKey(id, importId));
    } catch {
      // Nothing was kept either.
    }
  }

  return {
    state,
    problem,
    next,
    loadingMore,
    items,
    records,
    isAnyAtWork,
    uploads,
    load,
    more,
    read,
    start,
    cancel,
    undo,
    send,
    sendAgain,
    stopUpload,
    draftOf,
    keepDraft,
    forgetDraft,
  };
});
