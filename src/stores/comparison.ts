import { onScopeDispose, ref, shallowRef } from 'vue';
import { defineStore } from 'pinia';
import { compare, exportUnits } from '../../shared/contracts/comparison.ts';
import type { ComparisonAnswer, ComparisonQuestion } from '../../shared/contracts/comparison.ts';
import { cancelJob, readJob } from '../../shared/contracts/job.ts';
import type { Job } from '../../shared/contracts/job.ts';
import { download, request } from '../api/client.ts';
import { ApiProblem, asProblem, isAbort } from '../api/problem.ts';
import type { LoadState } from '../composables/useLoad.ts';

const pollMs = 1500;

/**
 * The question that is being asked and its last answer. An answer stays until the next one is there. When units
 * under other rules must be made first, `job` shows how far they are, and the answer follows.
 */
export const useComparisonStore = defineStore('comparison', () => {
  const state = ref<LoadState>('idle');
  const answer = shallowRef<ComparisonAnswer | null>(null);
  const problem = shallowRef<ApiProblem | null>(null);
  const job = shallowRef<Job | null>(null);
  const jobId = ref<number | null>(null);
  let asked: { stationId: number; question: ComparisonQuestion } | null = null;
  let current: AbortController | null = null;
  let timer: ReturnType<typeof setTimeout> | undefined;

  /** Asks; an older question is taken back. Never rejects: a failure becomes the state. */
  async function ask(stationId: number, question: ComparisonQuestion): Promise<void> {
    // An answer about another station must never stand under this one's name.
    if (asked !== null && asked.stationId !== stationId) answer.value = null;
    asked = { stationId, question };
    forgetJob();
    state.value = 'loading';
    await run();
  }

  /** The same question again, quietly: the picture stays as it is until the new answer is there. */
  async function refresh(): Promise<void> {
    if (asked === null || jobId.value !== null) return;
    if (state.value === 'failed') state.value = 'loading';
    await run();
  }

  async function run(): Promise<void> {
    if (asked === null) return;
    current?.abort();
    const mine = new AbortController();
    current = mine;
    const { stationId, question } = asked;
    try {
      const reply = await request(compare, { params: { stationId }, body: question, signal: mine.signal });
      if (current !== mine) return;
      if ('pending' in reply) {
        jobId.value = reply.jobId;
        state.value = 'loading';
        await follow();
        return;
      }
      answer.value = reply;
      problem.value = null;
      state.value = 'ready';
    } catch (error) {
      if (current === mine && !isAbort(error)) fail(asProblem(error));
    }
  }

  /** Looks how far the job is; asks again when it is done. Called by a timer and by live events. */
  async function follow(): Promise<void> {
    clearTimeout(timer);
    const id = jobId.value;
    if (asked === null || id === null) return;
    try {
      const { stationId } = asked;
      const read = await request(readJob, { params: { stationId, jobId: id }, signal: current?.signal });
      if (jobId.value !== id) return;
      job.value = read;
      if (read.state === 'done') {
        forgetJob();
        await run();
      } else if (read.state === 'dead' || read.state === 'cancelled') {
        forgetJob();
        fail(
          new ApiProblem(
            read.state === 'cancelled'
              ? 'Making the units under these rules was stopped. Ask again to start anew.'
              : `The units under these rules could not be made: ${read.error ?? 'no reason was given'}.`,
            { status: 0, code: 'job' },
          ),
        );
      } else {
        timer = setTimeout(() => void follow(), pollMs);
      }
    } catch (error) {
      if (jobId.value !== id || isAbort(error)) return;
      forgetJob();
      fail(asProblem(error));
    }
  }

  /** Stops the job that makes the units. Never rejects: a failure becomes the state. */
  async function cancel(): Promise<void> {
    const id = jobId.value;
    if (asked === null || id === null) return;
    try {
      await request(cancelJob, { params: { stationId: asked.stationId, jobId: id } });
      await follow();
    } catch (error) {
      if (jobId.value === id) fail(asProblem(error));
    }
  }

  function fail(why: ApiProblem): void {
    problem.value = why;
    state.value = 'failed';
  }

  function forgetJob(): void {
    clearTimeout(timer);
    jobId.value = null;
    job.value = null;
  }

  /** Takes back whatever is on its way: the page was left. The last answer stays for coming back. */
  function leave(): void {
    current?.abort();
    current = null;
    forgetJob();
    if (state.value === 'loading') state.value = answer.value === null ? 'idle' : 'ready';
  }

  /** All units behind the answer as a CSV file. @throws ApiProblem */
  function unitsCsv(
    stationId: number,
    question: ComparisonQuestion,
  ): Promise<{ blob: Blob; fileName: string | null }> {
    return download(exportUnits, { params: { stationId }, body: question });
  }

  onScopeDispose(leave);
  return { state, answer, problem, job, jobId, ask, refresh, follow, cancel, leave, unitsCsv };
});
