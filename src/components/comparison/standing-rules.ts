import type { PairingRulesInput } from '../../../shared/contracts/comparison.ts';
import { pairingRules } from '../../../shared/contracts/comparison.ts';
import type { Station } from '../../../shared/contracts/station.ts';

/** The station's own rules in the shape that a question carries. */
export function standingRules(station: Station): PairingRulesInput {
  const { blockMinutes, windowSeconds, freqToleranceKhz, guardSeconds } = station;
  return pairingRules.parse({ blockMinutes, windowSeconds, freqToleranceKhz, guardSeconds });
}
