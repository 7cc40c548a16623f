import { computed, onScopeDispose, ref, shallowRef } from 'vue';
import { defineStore } from 'pinia';
import { sensitivity } from '../../shared/contracts/comparison.ts';
import type { ComparisonQuestion } from '../../shared/contracts/comparison.ts';
import { readJob } from '../../shared/contracts/job.ts';
import type { Job } from '../../shared/contracts/job.ts';
import type { SensitivityReply } from '../../shared/pictures/sensitivity-option.ts';
import { request } from '../api/client.ts';
import { asProblem, isAbort } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import type { LoadState } from '../composables/useLoad.ts';

const pollMs = 3000;

/**
 * One question under other choices, worked out when somebody asks for it. While units are being made for some of
 * them, their jobs are followed, and what has become ready is asked for as each of them ends.
 */
export const useSensitivityStore = defineStore('sensitivity', () => {
  const state = ref<LoadState>('idle');
  const reply = shallowRef<SensitivityReply | null>(null);
  const problem = shallowRef<ApiProblem | null>(null);
  /** The jobs as they were last read, by id. */
  const jobs = shallowRef<ReadonlyMap<number, Job>>(new Map());
  /** Somebody stopped waiting: the jobs go on, this page does not ask for them. */
  const stopped = ref(false);
  let asked: { stationId: number; question: ComparisonQuestion } | null = null;
  let current: AbortController | null = null;
  let timer: ReturnType<typeof setTimeout> | undefined;
  let followedAtMs = 0;

  const waitingJobs = computed(() => [
    ...new Set(
      (reply.value?.variants ?? []).flatMap(({ state: at, jobId }) =>
        at === 'waiting' && jobId !== null ? [jobId] : [],
      ),
    ),
  ]);
  const isWaiting = computed(
    () => !stopped.value && (reply.value?.variants ?? []).some(({ state: at }) => at === 'waiting'),
  );

  /**
   * Asks; `prepare` has missing units made, where the person may. What was known stays until the reply is there.
   * Never rejects: a failure becomes the state.
   */
  async function ask(stationId: number, question: ComparisonQuestion, prepare: boolean): Promise<void> {
    asked = { stationId, question };
    stopped.value = false;
    state.value = 'loading';
    await run(prepare);
  }

  async function run(prepare: boolean): Promise<void> {
    if (asked === null) return;
    clearTimeout(timer);
    current?.abort();
    const mine = new AbortController();
    current = mine;
    const { stationId, question } = asked;
    try {
      const next = await request(sensitivity, {
        params: { stationId },
        body: { question, prepare },
        signal: mine.signal,
      });
      if (current !== mine) return;
      reply.value = next;
      problem.value = null;
      state.value = 'ready';
      followSoon();
    } catch (error) {
      if (current !== mine || isAbort(error)) return;
      const why = asProblem(error);
      // A night came in meanwhile and the units of the question itself are being made anew: that passes.
      if (why.code === 'units-pending' && isWaiting.value) {
        state.value = 'ready';
        followSoon();
        return;
      }
      problem.value = why;
      state.value = 'failed';
    }
  }

  function followSoon(): void {
    clearTimeout(timer);
    if (isWaiting.value) timer = setTimeout(() => void follow(), pollMs);
  }

  /** Looks how far the jobs are; asks again when one of them has ended. Called by a timer and by live events. */
  async function follow(): Promise<void> {
    if (asked === null || !isWaiting.value || state.value !== 'ready') return;
    clearTimeout(timer);
    followedAtMs = Date.now();
    const mine = current;
    const { stationId } = asked;
    try {
      const read = await Promise.all(
        waitingJobs.value.map((jobId) =>
          request(readJob, { params: { stationId, jobId }, signal: mine?.signal }),
        ),
      );
      if (current !== mine || !isWaiting.value) return;
      jobs.value = new Map(read.map((job) => [job.id, job]));
      // A row may wait without a job of its own: then only asking again tells.
      const ended = read.some(({ state: at }) => at === 'done' || at === 'dead' || at === 'cancelled');
      if (ended || read.length === 0) await run(false);
      else followSoon();
    } catch (error) {
      if (current !== mine || isAbort(error)) return;
      problem.value = asProblem(error);
      state.value = 'failed';
    }
  }

  /**
   * A live event about a job: it concerns this page when a row waits for that job. Every night that is made sends
   * one; the timer catches up with those that come thick and fast.
   */
  function onJob(jobId: number): void {
    if (waitingJobs.value.includes(jobId) && Date.now() - followedAtMs > 1000) void follow();
  }

  /** No more asking. What is ready stays; the jobs go on without this page. */
  function stop(): void {
    clearTimeout(timer);
    current?.abort();
    current = null;
    stopped.value = true;
    if (state.value === 'loading') state.value = reply.value === null ? 'idle' : 'ready';
  }

  /** Another question: what was worked out does not speak about it. */
  function forget(): void {
    stop();
    asked = null;
    reply.value = null;
    problem.value = null;
    jobs.value = new Map();
    state.value = 'idle';
  }

  onScopeDispose(stop);
  return { state, reply, problem, jobs, stopped, isWaiting, ask, follow, onJob, stop, forget };
});
