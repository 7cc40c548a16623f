export {
  ALTERNATING,
  HEARD_ON_A,
  HEARD_ON_B,
  SIMULTANEOUS,
  differenceOfMeans,
  type DwellColumns,
  type HeardOnlyColumns,
  type ListeningColumns,
  type PairingResult,
  type PairingWindow,
  type SnrLevels,
  type SpotColumns,
  type TagTally,
  type UnitColumns,
} from './columns.ts';
export { spotsNeeded } from './blocks.ts';
export { pairSpots } from './pair-spots.ts';
export {
  BLOCK_MINUTES,
  STANDING_RULES,
  checkRules,
  parseRulesKey,
  rulesKey,
  type PairingRules,
} from './rules.ts';
export { GUARDED, TAGGED, UNTAGGED, tagSpots, type TagColumns } from './tag.ts';
export {
  dwellColumns,
  heardOnlyRowsOf,
  spotColumns,
  unitRowsOf,
  type DwellRow,
  type HeardOnlyRow,
  type SpotRow,
  type UnitRow,
} from './from-rows.ts';
export { packHeardOnly, packUnits, unpackHeardOnly, unpackUnits, type PairPack } from './pack.ts';
