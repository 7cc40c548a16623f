import { largestSize, type Numbers, requireNumbers, requireOpenUnit, requirePositive } from './arguments.ts';
import { clusterSandwich, inClusterOrder, inverseDiagonal, support } from './cluster-covariance.ts';
import { groupClusters, pairClusters, readClusters } from './cluster-ids.ts';
import { type Design, readDesign } from './design.ts';
import { type Interval, tResult, type TResult } from './intervals.ts';
import { leastSquares, weightedDot } from './least-squares.ts';

export interface ClusterRegressionOptions {
  /** Confidence level of the intervals; 0.95 unless changed. */
  level?: number;
  /** One positive weight per row (any scale); all 1 unless given. */
  weights?: Numbers;
  /** A second clustering (e.g. by night) for two-way standard errors: one dense id per row. */
  secondClusters?: Numbers;
}

/** Why a coefficient, or its standard error, is missing. */
export type MissingReason =
  /** Tangled with other coefficients: see `confoundedWith`. */
  | 'cannot-be-separated'
  /** Its column is zero in every row, its cell is empty. */
  | 'no-rows'
  /** All its rows belong to one cluster, which says nothing about the spread between clusters. */
  | 'one-cluster'
  /** As many coefficients as rows. */
  | 'no-degrees-of-freedom'
  /** The residuals it rests on are all zero. */
  | 'no-spread';

export interface Coefficient {
  estimable: boolean;
  /** Null unless estimable. */
  estimate: number | null;
  /** Cluster-robust (CR1); null with t, p, interval and designEffect when there is a reason. */
  se: number | null;
  t: number | null;
  p: number | null;
  interval: Interval | null;
  /** CR1 variance over the variance that takes rows as independent. */
  designEffect: number | null;
  /** Rows, and clusters, in which the column is not zero. */
  rows: number;
  clusters: number;
  /** Indices of the coefficients it is tangled with, directly or through others. */
  confoundedWith: number[];
  reason: MissingReason | null;
  /** The two-way variance was not positive; the larger one-way variance stands in. */
  twoWayReplaced: boolean;
}

export interface ClusterRegressionResult {
  /** One per column of the design; cells first. */
  coefficients: Coefficient[];
  /** Units (rows). */
  n: number;
  /** Independent columns. */
  rank: number;
  clusters: number;
  /** Second-way clusters, null with one way. */
  secondClusters: number | null;
  /** Degrees of freedom of the intervals: clusters - 1 (the smaller of both ways). */
  df: number;
  level: number;
  /** Residual variance, sum of w r^2 / (n - rank); null without degrees of freedom. */
  residualVariance: number | null;
  residuals: Float64Array;
  /**
   * One solution (dependent columns at 0) and its CR1 covariance, row-major k by k, with the one-way
   * parts beside it when two-way. Only estimable combinations mean anything: use linearCombination.
   */
  solution: Float64Array;
  covariance: Float64Array | null;
  oneWayCovariances: Float64Array[];
  /** Combinations of coefficients that no data tell apart, largest entry 1. */
  nullSpace: number[][];
  /** Groups of coefficients that cannot be separated from each other. */
  confounded: number[][];
}

/** Groups of indices joined by the vectors' non-zero entries. */
function joinedGroups(vectors: readonly number[][], size: number): number[][] {
  const parent = Array.from({ length: size }, (_, j) => j);
  const root = (j: number): number => (parent[j] === j ? j : (parent[j] = root(parent[j]!)));
  const involved = new Set<number>();
  for (const vector of vectors) {
    let first = -1;
    vector.forEach((value, j) => {
      if (value === 0) return;
      involved.add(j);
      if (first >= 0) parent[root(j)] = root(first);
      else first = j;
    });
  }
  const groups = new Map<number, number[]>();
  for (const j of [...involved].sort((a, b) => a - b)) {
    groups.set(root(j), [...(groups.get(root(j)) ?? []), j]);
  }
  return [...groups.values()];
}

function quadratic(matrix: Float64Array, c: ArrayLike<number>): number {
  let sum = 0;
  for (let i = 0; i < c.length; i++) {
    if (c[i] === 0) continue;
    for (let j = 0; j < c.length; j++) sum += c[i]! * c[j]! * matrix[i * c.length + j]!;
  }
  return sum;
}

/** A two-way variance can come out at or below zero; the larger one-way variance is the safe side. */
function settle(variance: number, oneWay: readonly number[]): { variance: number; replaced: boolean } {
  const largest = Math.max(0, ...oneWay);
  const replaced = oneWay.length > 0 && !(variance > 1e-12 * largest) && largest > 0;
  return { variance: replaced ? largest : variance, replaced };
}

/**
 * Least squares with standard errors that take whole clusters, not rows, as independent.
 *
 * Covariance CR1: (X'WX)^-1 (sum over clusters of s_g s_g') (X'WX)^-1 * C/(C-1) * (n-1)/(n-rank), s_g the
 * cluster's sum of w r x; t intervals with C - 1 degrees of freedom. Sources: Liang and Zeger
 * (1986), Biometrika 73; Cameron and Miller (2015), J. Human Resources 50. Two ways: V1 + V2 - V12, each with its own
 * C/(C-1), smaller C for the degrees of freedom (Cameron, Gelbach and Miller 2011, J. Bus. Econ.
 * Stat. 29). Equals R sandwich::vcovCL(lm(...), cluster, type = "HC1", cadjust = TRUE).
 *
 * A coefficient is estimable when no combination in the null space of the design contains it. The
 * others get `cannot-be-separated` and the indices they are tangled with.
 *
 * Time O(n m^2), m the dense columns; cells cost nothing extra (see least-squares.ts). Dense designs of
 * many columns cost O(n k^2): give indicators as cells.
 *
 * @param design see Design; dB per unit of each column
 * @param y one difference per row, dB
 * @param clusters dense cluster id per row (see clusterIds)
 * @throws RangeError naming the argument: empty, unequal lengths, not finite, weights not positive,
 *   level outside (0, 1)
 * @example
 * const fit = clusterRegression({ cells: [0, 0, 1, 1], cellCount: 2 }, [1, 2, 3, 5], [0, 1, 0, 1]);
 * fit.coefficients[1].estimate // 4
 */
export function clusterRegression(
  design: Design,
  y: Numbers,
  clusters: Numbers,
  options: ClusterRegressionOptions = {},
): ClusterRegressionResult {
  const level = options.level ?? 0.95;
  requireOpenUnit('level', level);
  requireNumbers('y', y);
  const n = y.length;
  const checked = readDesign(design, n);
  const first = readClusters('clusters', clusters, n);
  const second = options.secondClusters ? readClusters('secondClusters', options.secondClusters, n) : null;
  const weights = options.weights ? Float64Array.from(options.weights) : null;
  if (weights) {
    if (weights.length !== n)
      throw new RangeError(`weights must hold one value per row (${n}), got ${weights.length}`);
    weights.forEach((weight, i) => requirePositive(`weights[${i}]`, weight));
  }
  const response = y instanceof Float64Array ? y : Float64Array.from(y);
  const fit = leastSquares(checked, response, weights);
  const { rank, residuals, solution, nullSpace } = fit;
  const k = solution.length;

  const smallestWay = Math.min(first.count, second?.count ?? Infinity);
  const noise = 1e-12 * largestSize(response);
  const general: MissingReason | null =
    n <= rank
      ? 'no-degrees-of-freedom'
      : smallestWay < 2
        ? 'one-cluster'
        : largestSize(residuals) <= noise
          ? 'no-spread'
          : null;

  const cellsInOrder = inClusterOrder(checked, first);
  let covariance: Float64Array | null = null;
  let oneWayCovariances: Float64Array[] = [];
  if (general === null) {
    const way = (ids: typeof first) => {
      const factor = (ids.count / (ids.count - 1)) * ((n - 1) / (n - rank));
      return clusterSandwich(checked, fit, weights, ids, ids === first ? cellsInOrder : undefined).map(
        (value) => value * factor,
      );
    };
    covariance = way(first);
    if (second) {
      const both = pairClusters(first.ids, second.ids);
      const inner = way(groupClusters(both.ids, both.count));
      oneWayCovariances = [covariance, way(second)];
      covariance = covariance.map((value, i) => value + oneWayCovariances[1]![i]! - inner[i]!);
    }
  }

  const squares = weightedDot(residuals, residuals, weights);
  const residualVariance = n > rank ? squares / (n - rank) : null;
  const naive = inverseDiagonal(checked, fit);
  const held = support(checked, first, cellsInOrder);
  const heldSecond = second ? support(checked, second).clusters : held.clusters;
  const confounded = joinedGroups(nullSpace, k).filter((group) => group.length > 1);
  const tangled = new Map(confounded.flatMap((group) => group.map((j) => [j, group] as const)));

  const coefficients = Array.from({ length: k }, (_, j): Coefficient => {
    const missing = (reason: MissingReason, estimable: boolean): Coefficient => ({
      estimable,
      estimate: estimable ? solution[j]! : null,
      se: null,
      t: null,
      p: null,
      interval: null,
      designEffect: null,
      rows: held.rows[j]!,
      clusters: held.clusters[j]!,
      confoundedWith: (tangled.get(j) ?? []).filter((other) => other !== j),
      reason,
      twoWayReplaced: false,
    });
    if (held.rows[j] === 0) return missing('no-rows', false);
    if (tangled.has(j)) return missing('cannot-be-separated', false);
    if (general !== null || covariance === null || residualVariance === null) {
      return missing(general ?? 'no-degrees-of-freedom', true);
    }
    if (Math.min(held.clusters[j]!, heldSecond[j]!) < 2) return missing('one-cluster', true);
    const at = j * k + j;
    const { variance, replaced } = settle(
      covariance[at]!,
      oneWayCovariances.map((matrix) => matrix[at]!),
    );
    const naiveVariance = residualVariance * naive[j]!;
    // Residuals that cancel within every cluster leave rounding behind: a millionth of the naive error is none.
    if (!(variance > 1e-12 * naiveVariance)) return missing('no-spread', true);
    const { estimate, se, t, p, interval } = tResult(
      solution[j]!,
      Math.sqrt(variance),
      smallestWay - 1,
      level,
    );
    return {
      ...missing('no-spread', true),
      estimate,
      se,
      t,
      p,
      interval,
      designEffect: variance / naiveVariance,
      reason: null,
      twoWayReplaced: replaced,
    };
  });

  return {
    coefficients,
    n,
    rank,
    clusters: first.count,
    secondClusters: second?.count ?? null,
    df: smallestWay - 1,
    level,
    residualVariance,
    residuals,
    solution,
    covariance,
    oneWayCovariances,
    nullSpace,
    confounded,
  };
}

/**
 * A weighted sum of coefficients with its cluster-robust interval, e.g. the difference of two cells.
 *
 * estimate = c'b, se = sqrt(c'Vc). O(k^2). Null when the data cannot separate it (c is not at right angles
 * to the null space) or bear no standard error.
 *
 * @param fit a result of clusterRegression
 * @param c one number per coefficient
 * @param options level: 0.95 unless changed
 * @throws RangeError when c has not one finite number per coefficient, or level is outside (0, 1)
 * @example linearCombination(fit, [1, -1])
 */
export function linearCombination(
  fit: ClusterRegressionResult,
  c: Numbers,
  options: { level?: number } = {},
): TResult | null {
  if (c.length !== fit.solution.length) {
    throw new RangeError(`c must hold one number per coefficient (${fit.solution.length}), got ${c.length}`);
  }
  requireNumbers('c', c);
  const level = options.level ?? 0.95;
  requireOpenUnit('level', level);
  const separable = fit.nullSpace.every((vector) => {
    let sum = 0;
    let size = 0;
    vector.forEach((value, j) => {
      sum += value * c[j]!;
      size = Math.max(size, Math.abs(value * c[j]!));
    });
    return Math.abs(sum) <= 1e-8 * size;
  });
  if (!separable || fit.covariance === null) return null;
  const { variance } = settle(
    quadratic(fit.covariance, c),
    fit.oneWayCovariances.map((matrix) => quadratic(matrix, c)),
  );
  if (!(variance > 0)) return null;
  let estimate = 0;
  for (let j = 0; j < c.length; j++) estimate += c[j]! * fit.solution[j]!;
  return tResult(estimate, Math.sqrt(variance), fit.df, level);
}
