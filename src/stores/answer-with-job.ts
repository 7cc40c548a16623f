import { onScopeDispose, ref, shallowRef } from 'vue';
import type { Ref, ShallowRef } from 'vue';
import { cancelJob, readJob } from '../../shared/contracts/job.ts';
import type { Job } from '../../shared/contracts/job.ts';
import { request } from '../api/client.ts';
import { ApiProblem, asProblem, isAbort } from '../api/problem.ts';
import type { LoadState } from '../composables/useLoad.ts';

const pollMs = 1500;

/** What the server says instead of an answer while a job makes the units. */
interface Pending {
  pending: true;
  jobId: number;
}

export interface AnswerWithJob<Question, Answer> {
  state: Ref<LoadState>;
  answer: ShallowRef<Answer | null>;
  problem: ShallowRef<ApiProblem | null>;
  /** How far the units are that must be made first; null: nothing has to be made. */
  job: ShallowRef<Job | null>;
  jobId: Ref<number | null>;
  /** Asks; an older question is taken back. Never rejects: a failure becomes the state. */
  ask: (stationId: number, question: Question) => Promise<void>;
  /** The same question again, quietly: the picture stays as it is until the new answer is there. */
  refresh: () => Promise<void>;
  /** Looks how far the job is; asks again when it is done. Called by a timer and by live events. */
  follow: () => Promise<void>;
  /** Stops the job that makes the units. Never rejects: a failure becomes the state. */
  cancel: () => Promise<void>;
  /** Takes back whatever is on its way: the page was left. The last answer stays for coming back. */
  leave: () => void;
}

/**
 * A question that is being asked and its last answer. An answer stays until the next one is there. When units
 * under other rules must be made first, `job` shows how far they are, and the answer follows.
 */
export function useAnswerWithJob<Question, Answer extends object>(
  send: (stationId: number, question: Question, signal: AbortSignal) => Promise<Answer | Pending>,
): AnswerWithJob<Question, Answer> {
  const state = ref<LoadState>('idle');
  const answer: ShallowRef<Answer | null> = shallowRef(null);
  const problem = shallowRef<ApiProblem | null>(null);
  const job = shallowRef<Job | null>(null);
  const jobId = ref<number | null>(null);
  let asked: { stationId: number; question: Question } | null = null;
  let current: AbortController | null = null;
  let timer: ReturnType<typeof setTimeout> | undefined;

  async function ask(stationId: number, question: Question): Promise<void> {
    // An answer about another station must never stand under this one's name.
    if (asked !== null && asked.stationId !== stationId) answer.value = null;
    asked = { stationId, question };
    forgetJob();
    state.value = 'loading';
    await run();
  }

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
    try {
      const reply = await send(asked.stationId, asked.question, mine.signal);
      if (current !== mine) return;
      if (isPending(reply)) {
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

  function leave(): void {
    current?.abort();
    current = null;
    forgetJob();
    if (state.value === 'loading') state.value = answer.value === null ? 'idle' : 'ready';
  }

  onScopeDispose(leave);
  return { state, answer, problem, job, jobId, ask, refresh, follow, cancel, leave };
}

function isPending(reply: object): reply is Pending {
  return 'pending' in reply;
}
