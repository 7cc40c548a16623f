import { type Numbers, requireCount, requireFinite, requireOpenUnit } from './arguments.ts';
import {
  addContact,
  type LadderContact,
  nullVectors,
  sweepGram,
  tells,
  withoutEachCluster,
} from './ladder-design.ts';
import { fitLadder } from './ladder-fit.ts';
import { allPairs, countSupport, type LadderPair } from './ladder-pairs.ts';
import { type LadderData, type LadderRows, readLadderRows } from './ladder-rows.ts';
import { type LadderRung, type LadderScale, standings } from './ladder-rungs.ts';
import { createRandom } from './random.ts';

export { type LadderContact, ladderGroups } from './ladder-design.ts';
export type { LadderEstimate } from './ladder-fit.ts';
export type { LadderPair } from './ladder-pairs.ts';
export type { LadderRows } from './ladder-rows.ts';
export type { LadderReason, LadderRung } from './ladder-rungs.ts';

export interface LadderOptions {
  /** Confidence level of the intervals; 0.95 unless changed. */
  level?: number;
  /** One positive weight per row (any scale); all 1 unless given. */
  weights?: Numbers;
  /** Values of its group are given against this antenna instead of the mean; ids without rows change nothing. */
  reference?: number;
  /** Draws behind `chanceBest`; 20,000 unless changed. */
  draws?: number;
  /** Seed of the draws; 1 unless changed. */
  seed?: number;
}

export interface LadderResult {
  /** By id. */
  antennas: LadderRung[];
  /** By id; only receivers that met another one. */
  receivers: LadderRung[];
  /** Ids that one scale holds, highest value first. The group with most rows comes first. */
  groups: number[][];
  receiverGroups: number[][];
  /** Every pair inside a group. */
  pairs: LadderPair[];
  /** What met what, with its rows; also where nothing can be told apart. */
  contacts: (LadderContact & { rows: number })[];
  /** Combinations of [antennas, receivers] (in the order of the lists above) that no data tell apart. */
  nullSpace: number[][];
  n: number;
  clusters: number;
  df: number;
  /** Independent coefficients. */
  rank: number;
  level: number;
  /** Residual variance, sum of w r^2 / (n - rank), dB^2; null without degrees of freedom. */
  residualVariance: number | null;
  draws: number;
}

/** Contacts that only one cluster has, by that cluster. */
function lonelyContacts({ contacts, soleCluster }: LadderData): Map<number, number[]> {
  const lonely = new Map<number, number[]>();
  for (let t = 0; t < contacts; t++) {
    const cluster = soleCluster[t]!;
    if (cluster >= 0) lonely.set(cluster, [...(lonely.get(cluster) ?? []), t]);
  }
  return lonely;
}

function readContacts({
  antennaIds,
  receiverIds,
  antennas,
  columns,
  rows,
}: LadderData): LadderResult['contacts'] {
  const receiver = (column: number) => (column < 0 ? null : receiverIds[column - antennaIds.length]!);
  return Array.from(rows, (count, t) => ({
    antennaA: antennaIds[antennas[2 * t]!]!,
    antennaB: antennaIds[antennas[2 * t + 1]!]!,
    receiverA: receiver(columns[4 * t + 2]!),
    receiverB: receiver(columns[4 * t + 3]!),
    rows: count,
  }));
}

/**
 * The ladder: all antennas on one scale from incomplete comparisons, the receivers' offsets taken out.
 *
 * d = theta_A - theta_B + rho_rA - rho_rB + error by (weighted) least squares; covariance CR1 over clusters
 * with factor C/(C-1) * (n-1)/(n-rank), t intervals with C-1 degrees of freedom. Equals R:
 * sandwich::vcovCL(lm(d ~ 0 + X, weights), cluster, type = "HC1", cadjust = TRUE) for every combination
 * that the data fix. Antennas whose difference the data fix form a group (a connected component, unless
 * receivers tangle it); values are against the mean of the group, receivers likewise.
 *
 * Rows with one design row are gathered first, so the fit is a QR of a few hundred rows; clusters need
 * their sums by such a row only. Time O(n + pairs * (entries + contacts * rank)), entries the distinct
 * (cluster, contact), at most n; memory O(n).
 *
 * No standard error (and no chance of being best) where one cluster alone carries a link, where there are
 * no degrees of freedom, and where nothing is left over; `reason` says which. Never NaN.
 *
 * @param rows see LadderRows; dB
 * @throws RangeError naming the argument: empty, unequal lengths, not finite, ids that are no whole
 *   numbers from 0, one antenna and one receiver on both sides, weights not positive, level outside (0, 1),
 *   draws that are no whole number from 1
 * @example
 * const rows = { antennaA: [1, 2, 1], antennaB: [2, 3, 3], receiverA: [7, 7, 7], receiverB: [7, 7, 7] };
 * ladder({ ...rows, difference: [1, 1, 2], clusters: [0, 1, 2] }).antennas[0].value // 1
 */
export function ladder(rows: LadderRows, options: LadderOptions = {}): LadderResult {
  const { level = 0.95, weights = null, reference = -1, draws = 20_000, seed = 1 } = options;
  requireOpenUnit('level', level);
  requireFinite('reference', reference);
  requireFinite('seed', seed);
  requireCount('draws', draws);
  if (draws === 0) throw new RangeError('draws must be a whole number from 1 up, got 0');
  const data = readLadderRows(rows, weights);
  const { antennaIds, receiverIds, columns, contacts } = data;
  const p = antennaIds.length;
  const k = p + receiverIds.length;

  const gram = new Float64Array(k * k);
  for (let t = 0; t < contacts; t++) addContact(gram, k, columns, t);
  const swept = sweepGram(gram, k);
  const lonely = lonelyContacts(data);
  const left = withoutEachCluster(gram, swept, columns, lonely);
  const fit = fitLadder(data, swept, level);
  const support = countSupport(data, k);
  const scale: LadderScale = {
    fit,
    solid: (i, j) => left.every((rest) => tells(rest, i, j)),
    reference: antennaIds.indexOf(reference),
    tie: 1e-9 * data.reach,
    idOf: (j) => (j < p ? antennaIds[j]! : receiverIds[j - p]!),
  };
  const antennas = standings([0, p], swept, scale, support, { draws, random: createRandom(seed) });
  const receivers = standings([p, k], swept, scale, support, null);
  const ids = (groups: number[][]) => groups.map((group) => group.map(scale.idOf));
  return {
    antennas: antennas.rungs,
    receivers: receivers.rungs,
    groups: ids(antennas.groups),
    receiverGroups: ids(receivers.groups),
    pairs: allPairs(antennas.groups, { data, fit, swept, gram, lonely }, scale, support),
    contacts: readContacts(data),
    nullSpace: nullVectors(swept),
    ...{ n: data.n, clusters: data.clusters, df: fit.df, rank: fit.rank, level, draws },
    residualVariance: fit.residualVariance,
  };
}
