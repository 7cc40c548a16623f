import type { ComparisonAnswer } from '../contracts/comparison.ts';
import { hodgesLehmann, pairedT, signTest, signedRank } from '../stats/index.ts';
import { clusterMeans } from './cluster-means.ts';

/** Means of integers differ by rounding in the last digits: ties are ties to a billionth of a decibel. */
const tieResolutionDb = 1e-9;

/** Rank tests, paired t and the chance that A hears better, all on cluster means (2.4, items 2 and 3). */
export function rankView(
  correctedDb: Float64Array,
  clusters: Int32Array,
  clusterCount: number,
  zeros: 'pratt' | 'drop',
): ComparisonAnswer['rank'] {
  if (clusterCount < 2) return null;
  const means = clusterMeans(correctedDb, clusters, clusterCount);
  // One rule for zeros in the whole rank view: where they are dropped before ranking, the shift estimated
  // by inverting that ranking does not see them either (as in R's wilcox.test).
  const ranked = zeros === 'drop' ? means.filter((d) => Math.abs(d) > tieResolutionDb) : means;
  const shift = hodgesLehmann(ranked.length > 0 ? ranked : means);
  const ranks = signedRank(means, { zeros, resolution: tieResolutionDb });
  const signs = signTest(means, { resolution: tieResolutionDb });
  const paired = pairedT(means);
  return {
    clusterMeanDb: paired.estimate,
    hodgesLehmannDb: shift.estimate,
    hodgesLehmannIntervalDb: shift.interval && [shift.interval[0], shift.interval[1]],
    signedRankP: ranks.n === 0 ? null : ranks.p,
    signTestP: signs.positive + signs.negative === 0 ? null : signs.p,
    pairedTP: paired.p,
    effectSizeDz: paired.dz,
    chanceAHearsBetter: signs.chance,
  };
}
