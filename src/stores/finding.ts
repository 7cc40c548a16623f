import { ref, shallowRef } from 'vue';
import { defineStore } from 'pinia';
import type { BodyInput } from '../../shared/contracts/endpoint.ts';
import * as contract from '../../shared/contracts/finding.ts';
import type { Finding, Paper, Recomputation, Share } from '../../shared/contracts/finding.ts';
import { download, request } from '../api/client.ts';
import { asProblem, isAbort } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import type { LoadState } from '../composables/useLoad.ts';
import { useAnswerWithJob } from './answer-with-job.ts';

interface Target {
  stationId: number;
  findingId: number;
}

/**
 * One frozen finding with its decisions and links. Changes reject with an ApiProblem for who asked for them;
 * loading never rejects. Asking today's data may have to wait for a job.
 */
export const useFindingStore = defineStore('finding', () => {
  const target = shallowRef<Target | null>(null);
  const finding = shallowRef<Finding | null>(null);
  const state = ref<LoadState>('idle');
  const problem = shallowRef<ApiProblem | null>(null);
  const shares = shallowRef<Share[]>([]);
  const sharesState = ref<LoadState>('idle');
  const sharesProblem = shallowRef<ApiProblem | null>(null);
  let opening = new AbortController();

  const recompute = useAnswerWithJob<number, Recomputation>((stationId, findingId, signal) =>
    request(contract.recomputeFinding, { params: { stationId, findingId }, signal }),
  );

  /** Nothing of the former finding stays. */
  function open(next: Target): void {
    opening.abort();
    opening = new AbortController();
    const same = target.value?.stationId === next.stationId && target.value.findingId === next.findingId;
    target.value = next;
    recompute.leave();
    recompute.answer.value = null;
    recompute.problem.value = null;
    recompute.state.value = 'idle';
    if (same) return;
    finding.value = null;
    shares.value = [];
    state.value = 'idle';
    sharesState.value = 'idle';
  }

  const params = () => {
    if (target.value === null) throw new Error('No finding is open.');
    return target.value;
  };

  async function load(): Promise<void> {
    const { signal } = opening;
    state.value = 'loading';
    try {
      const read = await request(contract.readFinding, { params: params(), signal });
      if (signal.aborted) return;
      finding.value = read;
      problem.value = null;
      state.value = 'ready';
    } catch (error) {
      if (signal.aborted || isAbort(error)) return;
      problem.value = asProblem(error);
      state.value = 'failed';
    }
  }

  async function loadShares(): Promise<void> {
    const { signal } = opening;
    sharesState.value = 'loading';
    try {
      const { items } = await request(contract.listShares, { params: params(), signal });
      if (signal.aborted) return;
      shares.value = items;
      sharesProblem.value = null;
      sharesState.value = 'ready';
    } catch (error) {
      if (signal.aborted || isAbort(error)) return;
      sharesProblem.value = asProblem(error);
      sharesState.value = 'failed';
    }
  }

  function askToday(): Promise<void> {
    const { stationId, findingId } = params();
    return recompute.ask(stationId, findingId);
  }

  async function decide(body: BodyInput<typeof contract.addDecision>): Promise<void> {
    const at = params();
    const added = await request(contract.addDecision, { params: at, body });
    const known = finding.value;
    if (target.value !== at || known === null) return;
    finding.value = { ...known, decisions: [...known.decisions, added], latestDecision: added };
  }

  /** The link is in this answer and nowhere else, this store included. */
  async function share(
    body: BodyInput<typeof contract.createShare>,
  ): Promise<{ label: string; url: string }> {
    const made = await request(contract.createShare, { params: params(), body });
    await loadShares();
    return { label: made.share.label, url: made.url };
  }

  async function withdraw(shareId: string): Promise<void> {
    await request(contract.withdrawShare, { params: { ...params(), shareId } });
    await loadShares();
  }

  const pdf = (paper: Paper) => download(contract.findingPdf, { params: params(), query: { paper } });
  const unitsCsv = () => download(contract.findingUnits, { params: params() });

  return {
    ...{ target, finding, state, problem, shares, sharesState, sharesProblem },
    now: recompute.answer,
    nowState: recompute.state,
    nowProblem: recompute.problem,
    job: recompute.job,
    jobId: recompute.jobId,
    follow: recompute.follow,
    cancel: recompute.cancel,
    leave: recompute.leave,
    ...{ open, load, loadShares, askToday, decide, share, withdraw, pdf, unitsCsv },
  };
});
