import type { Numbers } from './arguments.ts';
import {
  clusterRegression,
  type ClusterRegressionOptions,
  type MissingReason,
} from './cluster-regression.ts';
import type { Interval } from './intervals.ts';

export interface ClusterMeanResult {
  estimate: number;
  se: number | null;
  df: number;
  t: number | null;
  p: number | null;
  interval: Interval | null;
  level: number;
  /** Units. */
  n: number;
  clusters: number;
  secondClusters: number | null;
  designEffect: number | null;
  /** Why there is no standard error, null when there is one. */
  reason: MissingReason | null;
  twoWayReplaced: boolean;
}

/**
 * Mean of y with a standard error that takes clusters as independent: clusterRegression with an
 * intercept only, so se^2 = C/(C-1) * sum over clusters of (sum of (y - mean))^2 / n^2 (without weights).
 * One cluster, one value or values all equal: se, t, p and interval are null and `reason` says why. O(n).
 *
 * @param y one difference per unit, dB
 * @param clusters dense cluster id per unit (see clusterIds)
 * @throws RangeError naming the argument, as clusterRegression
 * @example clusterMean([1, 2, 3, 6], [0, 0, 1, 1]).estimate // 3
 */
export function clusterMean(
  y: Numbers,
  clusters: Numbers,
  options: ClusterRegressionOptions = {},
): ClusterMeanResult {
  const fit = clusterRegression({ cells: new Int32Array(y.length), cellCount: 1 }, y, clusters, options);
  const { se, t, p, interval, designEffect, reason, twoWayReplaced } = fit.coefficients[0]!;
  const { df, level, n, secondClusters } = fit;
  return {
    estimate: fit.solution[0]!,
    se,
    df,
    t,
    p,
    interval,
    level,
    n,
    clusters: fit.clusters,
    secondClusters,
    designEffect,
    reason,
    twoWayReplaced,
  };
}
