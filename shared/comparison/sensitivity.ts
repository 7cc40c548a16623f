import type { ComparisonQuestion, PairingRulesInput, SensitivityVariant } from '../contracts/comparison.ts';
import { clusterIds } from '../stats/index.ts';
import { clusterKeys } from './fairness.ts';
import { estimateComparison, fitComparison, type ComparisonEstimate, type FitOptions } from './fit.ts';
import type { ComparisonInput } from './input.ts';
import { rankView } from './rank-view.ts';
import { decibels } from './wording.ts';

/** What a variant says, without whether its units are there. */
export type VariantAnswer = Omit<SensitivityVariant, 'state' | 'jobId'>;
export type VariantName = Pick<SensitivityVariant, 'key' | 'group' | 'label'>;

const heaviestStations = 5;

const blocks: PairingRulesInput['blockMinutes'][] = [5, 15, 30, 60];
const windows = [15, 30, 60];
const guards = [10, 20, 40];

/** The same question under one other rule: each needs units of its own. */
export function ruleVariants(rules: PairingRulesInput): (VariantName & { rules: PairingRulesInput })[] {
  return [
    ...blocks
      .filter((blockMinutes) => blockMinutes !== rules.blockMinutes)
      .map((blockMinutes) => ({
        key: `block-${blockMinutes}`,
        group: 'block length' as const,
        label: `Blocks of ${blockMinutes}\u2009min`,
        rules: { ...rules, blockMinutes },
      })),
    ...windows
      .filter((windowSeconds) => windowSeconds !== rules.windowSeconds)
      .map((windowSeconds) => ({
        key: `window-${windowSeconds}`,
        group: 'matching window' as const,
        label: `Window of ${windowSeconds}\u2009s`,
        rules: { ...rules, windowSeconds },
      })),
    ...guards
      .filter((guardSeconds) => guardSeconds !== rules.guardSeconds)
      .map((guardSeconds) => ({
        key: `guard-${guardSeconds}`,
        group: 'guard' as const,
        label: `Guard of ${guardSeconds}\u2009s`,
        rules: { ...rules, guardSeconds },
      })),
  ];
}

/** The estimate of units made under other rules. */
export function ruleVariant({ name, input }: { name: VariantName; input: ComparisonInput }): VariantAnswer {
  return variantOf(name, estimateComparison(input));
}

/** Every variant that the units at hand can answer; the first is the question as it was asked. */
export function unitVariants(input: ComparisonInput): VariantAnswer[] {
  const other = input.question.clustering === 'one-way' ? 'two-way' : 'one-way';
  const asked = (change: Partial<ComparisonQuestion>, options?: FitOptions) =>
    estimateComparison({ ...input, question: { ...input.question, ...change } }, options);
  return [
    variantOf({ key: 'as-asked', group: 'as asked', label: 'As asked' }, asked({})),
    ...rankVariants(input),
    variantOf(
      {
        key: `clusters-${other}`,
        group: 'clustering',
        label: other === 'two-way' ? 'Stations and nights (two-way)' : 'Station-nights (one-way)',
      },
      asked({ clustering: other }),
    ),
    variantOf(
      {
        key: 'without-heaviest',
        group: 'stations',
        label: `Without the ${heaviestStations} stations with most units`,
      },
      asked({}, { withoutHeaviest: heaviestStations }),
    ),
    variantOf(
      { key: 'equal-stations', group: 'weights', label: 'Every station counts the same' },
      asked({}, { equalStations: true }),
    ),
  ];
}

function variantOf(name: VariantName, { verdict, estimate, counts }: ComparisonEstimate): VariantAnswer {
  return {
    ...name,
    estimateDb: estimate?.estimateDb ?? null,
    intervalDb: estimate?.interval95Db ?? null,
    units: counts.units,
    clusters: counts.clusters,
    verdict: verdict.code,
  };
}

/** The rule about zeros acts on the rank view only: its shift stands in for the estimate. */
function rankVariants(input: ComparisonInput): VariantAnswer[] {
  const { selected, correctedDb, counts, separable } = fitComparison(input);
  const { ids, count } = clusterIds(clusterKeys(selected));
  return (['drop', 'pratt'] as const).map((zeros) => {
    const rank = separable ? rankView(correctedDb, ids, count, zeros) : null;
    return {
      key: `zeros-${zeros}`,
      group: 'zeros' as const,
      label: zeros === 'drop' ? 'Ranks, zeros dropped' : 'Ranks, zeros kept',
      estimateDb: rank?.hodgesLehmannDb ?? null,
      intervalDb: rank?.hodgesLehmannIntervalDb ?? null,
      units: counts.units,
      clusters: counts.clusters,
      verdict: null,
    };
  });
}

/** What the variants say together: whether any choice would have changed the answer. */
export function sensitivitySentence(variants: readonly VariantAnswer[], marginDb: number): string {
  const base = variants.find(({ group }) => group === 'as asked');
  const known = variants.filter(({ estimateDb }) => estimateDb !== null);
  if (base?.estimateDb == null || known.length < 2) return 'There is no estimate to vary.';
  const estimates = known.map(({ estimateDb }) => estimateDb!);
  const [low, high] = [Math.min(...estimates), Math.max(...estimates)];
  const range = `Between ${decibels(low)} and ${decibels(high)}\u2009dB under all ${known.length} choices`;
  if (low < 0 && high > 0) return `${range}: which antenna is ahead depends on the choice.`;
  const furthest = known.reduce((far, variant) =>
    Math.abs(variant.estimateDb! - base.estimateDb!) > Math.abs(far.estimateDb! - base.estimateDb!)
      ? variant
      : far,
  );
  if (Math.abs(furthest.estimateDb! - base.estimateDb) > marginDb) {
    return `${range}: \u201c${furthest.label}\u201d moves it by more than the margin. Look at why before you act on it.`;
  }
  return `${range}: no choice moves it by more than the margin of ${decibels(marginDb)}\u2009dB.`;
}
