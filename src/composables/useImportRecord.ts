import { computed, watch } from 'vue';
import type { ComputedRef } from 'vue';
import { useRoute } from 'vue-router';
import { useIntervalFn, useThrottleFn } from '@vueuse/core';
import type { ImportRecord } from '../../shared/contracts/import.ts';
import type { Job } from '../../shared/contracts/job.ts';
import { readJob } from '../../shared/contracts/job.ts';
import { request } from '../api/client.ts';
import { countsSentence } from '../components/imports/import-words.ts';
import { atWork, useImportsStore } from '../stores/imports.ts';
import { useStationStore } from '../stores/station.ts';
import { useAnnouncer } from './useAnnouncer.ts';
import { useEventStream } from './useEventStream.ts';
import { useLoad } from './useLoad.ts';
import type { Load } from './useLoad.ts';

export interface ImportUnderWay {
  params: ComputedRef<{ stationId: number; importId: number }>;
  record: ComputedRef<ImportRecord | null>;
  loaded: Load<ImportRecord>;
  /** The latest work on this import; read once it has run, where the role may. */
  work: Load<Job>;
  mayWrite: ComputedRef<boolean>;
  takingBack: ComputedRef<boolean>;
  undoFailed: ComputedRef<boolean>;
  isAtWork: ComputedRef<boolean>;
  /** It came to its end, one way or the other. */
  hasRun: ComputedRef<boolean>;
  mayUndo: ComputedRef<boolean>;
  /** Its file can be read (again), under a mapping to be chosen. */
  isReadable: ComputedRef<boolean>;
}

/** The import that the address names, kept up with the server; says aloud when it is done. */
export function useImportRecord(): ImportUnderWay {
  const route = useRoute();
  const here = useStationStore();
  const imports = useImportsStore();
  const { announce } = useAnnouncer();

  const stationId = computed(() => here.stationId!);
  const importId = computed(() => Number(route.params.importId));
  const params = computed(() => ({ stationId: stationId.value, importId: importId.value }));
  const mayWrite = computed(() => here.may('import:write'));

  const loaded = useLoad((signal) => imports.read(stationId.value, importId.value, signal));
  const record = computed(() => imports.records.get(importId.value) ?? null);

  /** The latest work on this import: whether it is being taken back is told by its job alone. */
  const work = useLoad((signal) =>
    request(readJob, { params: { stationId: stationId.value, jobId: record.value!.jobId! }, signal }),
  );
  const takingBack = computed(
    () =>
      work.data.value?.kind === 'import-undo' &&
      work.data.value.id === record.value?.jobId &&
      ['queued', 'running'].includes(work.data.value.state),
  );
  const undoFailed = computed(
    () =>
      work.data.value?.kind === 'import-undo' &&
      work.data.value.id === record.value?.jobId &&
      work.data.value.state === 'dead',
  );
  const isAtWork = computed(
    () => record.value !== null && (atWork.includes(record.value.state) || takingBack.value),
  );
  const isLeft = computed(() => {
    const now = record.value;
    return (
      now !== null && now.rowsStored > now.rowsUndone && ['done', 'failed', 'cancelled'].includes(now.state)
    );
  });
  const mayUndo = computed(() => mayWrite.value && isLeft.value && !takingBack.value);
  const isReadable = computed(
    () =>
      record.value !== null &&
      mayWrite.value &&
      !takingBack.value &&
      (['uploaded', 'undone'].includes(record.value.state) ||
        (['cancelled', 'failed'].includes(record.value.state) && !isLeft.value)),
  );
  const hasRun = computed(
    () => record.value !== null && ['done', 'failed', 'cancelled', 'undone'].includes(record.value.state),
  );

  const readSoon = useThrottleFn(() => void loaded.run(), 700, true);
  const { state: stream } = useEventStream(() => here.stationId, {
    onEvent(event) {
      if (event.type === 'import' && event.importId === importId.value) void readSoon();
      else if (event.type === 'job' && event.jobId === record.value?.jobId && hasRun.value) void work.run();
    },
    onGap: () => void readSoon(),
  });
  let ticks = 0;
  // Events tell at once; asking now and then also helps where they do not come through.
  useIntervalFn(() => {
    ticks += 1;
    if (isAtWork.value && (stream.value !== 'open' || ticks % 4 === 0)) void readSoon();
  }, 2000);

  watch(params, () => void loaded.run(), { immediate: true });
  watch(
    [() => record.value?.jobId, () => record.value?.state, () => record.value?.rowsUndone],
    ([jobId]) => {
      if (jobId !== undefined && jobId !== null && hasRun.value && here.may('job:read')) void work.run();
    },
    { immediate: true },
  );
  watch(
    () => [importId.value, record.value?.state] as const,
    ([id, state], [formerId, former]) => {
      const ended = former !== undefined && id === formerId && atWork.includes(former) && hasRun.value;
      if (ended && state === 'done' && record.value) announce(countsSentence(record.value));
    },
  );

  return {
    ...{ params, record, loaded, work, mayWrite, takingBack, undoFailed },
    ...{ isAtWork, hasRun, mayUndo, isReadable },
  };
}
