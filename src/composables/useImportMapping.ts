import { computed, shallowRef, watch } from 'vue';
import type { ComputedRef, ShallowRef } from 'vue';
import { useDebounceFn } from '@vueuse/core';
import type { z } from 'zod';
import { listMappings, previewImport, removeMapping, saveMapping } from '../../shared/contracts/import.ts';
import type {
  ImportMapping,
  ImportPreview,
  ImportRecord,
  savedMapping,
} from '../../shared/contracts/import.ts';
import { request } from '../api/client.ts';
import type { ApiProblem } from '../api/problem.ts';
import { forThisFile } from '../components/imports/mapping.ts';
import { useImportsStore } from '../stores/imports.ts';
import type { Acting } from './useActing.ts';
import { useAnnouncer } from './useAnnouncer.ts';
import { useLoad } from './useLoad.ts';
import type { Load } from './useLoad.ts';

interface MappedImport {
  params: () => { stationId: number; importId: number };
  record: () => ImportRecord | null;
  isReadable: () => boolean;
  act: Acting<'start' | 'mapping'>['act'];
}

export interface MappingOfImport {
  /** Null until there is a draft, a former mapping or a guess. */
  mapping: ShallowRef<ImportMapping | null>;
  preview: Load<ImportPreview>;
  /** The preview is of a former mapping still. */
  isStale: ComputedRef<boolean>;
  savedOfKind: ComputedRef<z.infer<typeof savedMapping>[]>;
  startProblem: ShallowRef<ApiProblem | null>;
  mappingProblem: ShallowRef<ApiProblem | null>;
  setMapping: (next: ImportMapping) => void;
  loadSaved: (id: number) => void;
  guessAgain: () => void;
  /** Reads the whole file under the mapping. Never rejects: a failure becomes `startProblem`. */
  start: () => Promise<void>;
  saveAs: (name: string) => void;
  forget: (mappingId: number) => void;
}

/** The mapping that an import is to be read under, and what the first lines of its file become by it. */
export function useImportMapping({ params, record, isReadable, act }: MappedImport): MappingOfImport {
  const imports = useImportsStore();
  const { announce } = useAnnouncer();

  const mapping = shallowRef<ImportMapping | null>(null);
  const previewed = shallowRef<ImportMapping | null>(null);
  const startProblem = shallowRef<ApiProblem | null>(null);
  const mappingProblem = shallowRef<ApiProblem | null>(null);
  const preview = useLoad(async (signal) => {
    const asked = mapping.value;
    const answer = await request(previewImport, {
      params: params(),
      body: { mapping: asked ?? undefined },
      signal,
    });
    mapping.value ??= answer.guess;
    previewed.value = asked ?? answer.guess;
    return answer;
  });
  const previewSoon = useDebounceFn(() => {
    if (mapping.value !== previewed.value) void preview.run();
  }, 350);
  const isStale = computed(() => preview.data.value !== null && mapping.value !== previewed.value);
  const saved = useLoad((signal) =>
    request(listMappings, { params: { stationId: params().stationId }, signal }).then(({ items }) => items),
  );
  const savedOfKind = computed(() => (saved.data.value ?? []).filter(({ kind }) => kind === record()?.kind));

  function setMapping(next: ImportMapping): void {
    mapping.value = next;
    startProblem.value = null;
    imports.keepDraft(params().stationId, params().importId, next);
    void previewSoon();
  }

  function loadSaved(id: number): void {
    const chosen = savedOfKind.value.find((each) => each.id === id);
    if (chosen) setMapping(forThisFile(chosen.mapping, mapping.value));
  }

  function guessAgain(): void {
    const guess = preview.data.value?.guess;
    if (guess) setMapping(guess);
  }

  async function start(): Promise<void> {
    const chosen = mapping.value;
    if (chosen === null) return;
    startProblem.value = null;
    const started = await act(
      'start',
      () => imports.start(params().stationId, params().importId, chosen),
      (failed) => (startProblem.value = failed),
    );
    if (started) announce('The import was started');
  }

  /** Its own problem: it belongs beside the name, not over the page. */
  async function changeSaved(change: () => Promise<unknown>, word: string): Promise<void> {
    mappingProblem.value = null;
    if (!(await act('mapping', change, (failed) => (mappingProblem.value = failed)))) return;
    await saved.run();
    announce(word);
  }

  function saveAs(name: string): void {
    const chosen = mapping.value;
    if (chosen === null) return;
    void changeSaved(
      () =>
        request(saveMapping, { params: { stationId: params().stationId }, body: { name, mapping: chosen } }),
      `Mapping saved as ${name}`,
    );
  }

  function forget(mappingId: number): void {
    void changeSaved(
      () => request(removeMapping, { params: { stationId: params().stationId, mappingId } }),
      'Mapping forgotten',
    );
  }

  watch(
    params,
    () => {
      mapping.value = null;
      previewed.value = null;
      startProblem.value = null;
      void saved.run();
    },
    { immediate: true },
  );
  watch(
    [isReadable, () => params().importId],
    ([now]) => {
      if (!now) return;
      mapping.value ??= imports.draftOf(params().stationId, params().importId) ?? record()?.mapping ?? null;
      void preview.run();
    },
    { immediate: true },
  );

  return {
    ...{ mapping, preview, isStale, savedOfKind, startProblem, mappingProblem },
    ...{ setMapping, loadSaved, guessAgain, start, saveAs, forget },
  };
}
