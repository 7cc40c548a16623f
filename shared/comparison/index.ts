export { answerComparison } from './answer.ts';
export { clusterMeans } from './cluster-means.ts';
export { estimateComparison, type ComparisonEstimate, type ComparisonResult } from './fit.ts';
export type { CallFacts, ComparedAntenna, ComparisonInput, NightTally } from './input.ts';
export {
  ruleVariant,
  ruleVariants,
  sensitivitySentence,
  unitVariants,
  type VariantAnswer,
  type VariantName,
} from './sensitivity.ts';
export { selectUnits, type SelectedUnits } from './selection.ts';
export { decibels } from './wording.ts';
