import { computed, shallowRef, watch } from 'vue';
import type { ComputedRef } from 'vue';
import { useRouter } from 'vue-router';
import type { ComparisonAnswer, ComparisonQuestion, Trial } from '../../shared/contracts/comparison.ts';
import { questionSentence } from '../../shared/contracts/comparison-sentence.ts';
import type { QuestionNames } from '../../shared/contracts/comparison-sentence.ts';
import { encodeQuestion, sameQuestion } from '../../shared/contracts/comparison-url.ts';
import { freezeFinding } from '../../shared/contracts/finding.ts';
import type { Finding } from '../../shared/contracts/finding.ts';
import { request } from '../api/client.ts';
import type FreezeDialog from '../components/findings/FreezeDialog.vue';
import { useAnswerWithJob } from '../stores/answer-with-job.ts';
import { useSessionStore } from '../stores/session.ts';
import { useStationStore } from '../stores/station.ts';
import { useAnnouncer } from './useAnnouncer.ts';
import { firstByPath } from './useForm.ts';

type DialogProps = InstanceType<typeof FreezeDialog>['$props'];

export interface Freezing {
  /** What the dialog shows; null: it is closed. */
  dialog: ComputedRef<Omit<DialogProps, `on${string}`> | null>;
  /** The answer on the screen; a saved trial counts as where it came from while it asks the same. */
  freezeAnswer: (answer: ComparisonAnswer, trial: Trial | null) => void;
  /** A trial, whose question is asked of the data of today. */
  freezeTrial: (trial: Trial) => void;
  close: () => void;
  /** Stops the job that makes the units. */
  cancel: () => Promise<void>;
  /** `saved` forgets the draft. Opens the report when it worked; a failure is shown and loses nothing. */
  freeze: (text: { title: string; note: string }, saved: () => void) => Promise<void>;
}

interface Target {
  question: ComparisonQuestion;
  trial: Trial | null;
  /** The answer of today in words, where it has been asked. */
  verdict: string | null;
}
type Body = { title: string; note: string; trialId: number | null; question: ComparisonQuestion };

/** Freezes an answer as a finding, from wherever a question stands, and goes to its report. */
export function useFreezing(stationId: ComputedRef<number>, names: ComputedRef<QuestionNames>): Freezing {
  const router = useRouter();
  const session = useSessionStore();
  const here = useStationStore();
  const { announce } = useAnnouncer();
  const asking = useAnswerWithJob<Body, Finding>((id, body, signal) =>
    request(freezeFinding, { params: { stationId: id }, body, signal }),
  );
  const target = shallowRef<Target | null>(null);
  const wrong = shallowRef<Record<string, string>>({});
  let forgetDraft: () => void = () => undefined;

  const waits = computed(() => asking.jobId.value !== null);
  const busy = computed(() => asking.state.value === 'loading' && !waits.value);
  const dialog = computed(() => {
    if (target.value === null) return null;
    const { question, trial, verdict } = target.value;
    const { antenna } = names.value;
    const problem = asking.state.value === 'failed' ? asking.problem.value : null;
    return {
      ...{ verdict, problem, trialName: trial?.name ?? null },
      draftKey: `${session.profile?.id}.${stationId.value}.freeze.${JSON.stringify(encodeQuestion(question))}`,
      sentence: questionSentence(question, names.value),
      title: trial?.name ?? `${antenna(question.antennaA)} against ${antenna(question.antennaB)}`,
      errors: { ...problem?.fieldErrors, ...wrong.value },
      ...{ busy: busy.value, waits: waits.value, job: asking.job.value, mayCancel: here.may('job:cancel') },
    };
  });

  function forgetAnswer(): void {
    asking.leave();
    asking.answer.value = null;
    asking.problem.value = null;
    asking.state.value = 'idle';
    wrong.value = {};
  }
  function open(next: Target | null): void {
    forgetAnswer();
    target.value = next;
  }

  async function freeze(text: { title: string; note: string }, saved: () => void): Promise<void> {
    if (target.value === null || asking.state.value === 'loading') return;
    const { trial, question } = target.value;
    const body = { ...text, trialId: trial?.id ?? null, question };
    const checked = freezeFinding.body.safeParse(body);
    wrong.value = checked.success ? {} : firstByPath(checked.error.issues);
    if (!checked.success) return;
    forgetDraft = saved;
    await asking.ask(stationId.value, body);
  }

  // Not after `ask`: where units are made first, the finding comes later than that.
  watch(asking.answer, async (frozen) => {
    if (frozen === null) return;
    forgetDraft();
    open(null);
    announce(`Frozen as finding ${frozen.title}`);
    await router.push({
      name: 'finding',
      params: { stationId: String(stationId.value), findingId: String(frozen.id) },
    });
  });

  return {
    dialog,
    freezeAnswer: ({ question, verdict }, trial) =>
      open({
        question,
        trial: trial !== null && sameQuestion(trial.question, question) ? trial : null,
        verdict: verdict.sentence,
      }),
    freezeTrial: (trial) => open({ question: trial.question, trial, verdict: null }),
    close: () => open(null),
    cancel: asking.cancel,
    freeze,
  };
}
