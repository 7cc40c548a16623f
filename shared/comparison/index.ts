export {
  answerComparison,
  clusterMeans,
  estimateComparison,
  type ComparisonEstimate,
  type ComparisonResult,
} from './answer.ts';
export type { CallFacts, ComparedAntenna, ComparisonInput, NightTally } from './input.ts';
export { selectUnits, type SelectedUnits } from './selection.ts';
export { decibels } from './wording.ts';
