import { computed, ref, watch } from 'vue';
import type { ComputedRef, Ref } from 'vue';
import { useRoute, useRouter } from 'vue-router';
import type { ComparisonCell, ComparisonQuestion } from '../../shared/contracts/comparison.ts';
import {
  completeQuestion,
  decodeQuestion,
  encodeQuestion,
  sameQuestion,
} from '../../shared/contracts/comparison-url.ts';
import type { QuestionDraft } from '../../shared/contracts/comparison-url.ts';
import { cellTitle } from '../../shared/pictures/cell-words.ts';
import { narrowQuestion } from '../components/comparison/narrow-question.ts';
import { useComparisonStore } from '../stores/comparison.ts';
import { useStationStore } from '../stores/station.ts';
import { useTrialsStore } from '../stores/trials.ts';

type Trial = ReturnType<typeof useTrialsStore>['trials'][number];

export interface AskedQuestion {
  /** The question as far as the address tells it. */
  draft: ComputedRef<QuestionDraft>;
  /** The same once it is complete; null: it cannot be asked yet. */
  question: ComputedRef<ComparisonQuestion | null>;
  /** The saved trial that the address names, and whether the question has been changed since. */
  trial: ComputedRef<Trial | null>;
  trialChanged: ComputedRef<boolean>;
  /** What the address said wrongly; kept while it is mended, until the next question is asked by hand. */
  problems: Ref<string[]>;
  narrowedTo: Ref<string | null>;
  ask: (next: QuestionDraft) => void;
  /** Asks about the hours, direction or kind of one cell of the answer. */
  narrow: (cell: ComparisonCell) => void;
  undoNarrowing: () => void;
}

/** Parts of the address that belong to the page, not to the question; they outlive a new question. */
const pageKeys = ['trial', 'wall', 'cells'] as const;

/** The question of the Compare page: it lives in the address, so that a link is a question. */
export function useAskedQuestion(stationId: ComputedRef<number>): AskedQuestion {
  const route = useRoute();
  const router = useRouter();
  const here = useStationStore();
  const comparison = useComparisonStore();
  const trials = useTrialsStore();

  const decoded = computed(() => decodeQuestion(route.query, pageKeys));
  const draft = computed(() => decoded.value.draft);
  const question = computed(() => completeQuestion(draft.value));
  const trial = computed(() => trials.trials.find(({ id }) => String(id) === route.query.trial) ?? null);
  const trialChanged = computed(
    () => trial.value !== null && !sameQuestion(trial.value.question, draft.value),
  );
  const narrowedTo = ref<string | null>(null);
  const problems = ref<string[]>([]);
  watch(
    decoded,
    (next) => {
      if (next.problems.length > 0) problems.value = next.problems;
    },
    { immediate: true },
  );

  /** Fills in what an address leaves open: the latest trial when it says nothing, else antennas in service. */
  async function fillIn(): Promise<void> {
    if (question.value !== null || here.antennas.length < 2) return;
    const { antennaA, antennaB } = draft.value;
    const latest = trials.trials[0];
    if (
      latest !== undefined &&
      antennaA === null &&
      antennaB === null &&
      Object.keys(route.query).length === 0
    ) {
      await router.replace({ query: { ...encodeQuestion(latest.question), trial: String(latest.id) } });
      return;
    }
    const inService = [...here.antennas].sort(
      (one, other) => Number(one.inServiceTo !== null) - Number(other.inServiceTo !== null),
    );
    const free = inService.filter(({ id }) => id !== antennaA && id !== antennaB);
    const a = antennaA ?? free.shift()!.id;
    const b = antennaB ?? free.shift()!.id;
    await router.replace({ query: queryOf({ ...draft.value, antennaA: a, antennaB: b }) });
  }

  function queryOf(next: QuestionDraft): Record<string, string> {
    const kept = Object.fromEntries(
      pageKeys.flatMap((key) => {
        const value = route.query[key];
        return typeof value === 'string' ? [[key, value]] : [];
      }),
    );
    return { ...encodeQuestion(next), ...kept };
  }

  function ask(next: QuestionDraft): void {
    narrowedTo.value = null;
    problems.value = [];
    if (!sameQuestion(next, draft.value)) void router.push({ query: queryOf(next) });
  }

  function narrow(cell: ComparisonCell): void {
    const { answer } = comparison;
    if (answer === null) return;
    const next = narrowQuestion(draft.value, cell, answer.bandHours.basis);
    if (sameQuestion(next, draft.value)) return;
    ask(next);
    narrowedTo.value = cellTitle(cell, answer);
  }

  function undoNarrowing(): void {
    narrowedTo.value = null;
    router.back();
  }

  watch(
    stationId,
    async (id) => {
      await trials.load(id);
      await fillIn();
    },
    { immediate: true },
  );
  watch(question, (next) => {
    if (next === null) void fillIn();
  });

  return { draft, question, trial, trialChanged, problems, narrowedTo, ask, narrow, undoNarrowing };
}
