import { tTwoSided, tUpperQuantile } from './distributions/student.ts';
import type { Interval } from './intervals.ts';
import type { SweptGram } from './ladder-design.ts';
import type { LadderData } from './ladder-rows.ts';
import { pivotedQr, solveLower } from './pivoted-qr.ts';

/** A combination of antennas and receivers with its cluster-robust error. */
export interface LadderEstimate {
  /** dB */
  estimate: number;
  /** Null, with interval and p, where the data bear no standard error. */
  se: number | null;
  interval: Interval | null;
  /** Two-sided p of "the truth is zero". */
  p: number | null;
}

/** Why nothing in the ladder has a standard error. */
export type LadderGap = 'one-cluster' | 'no-degrees-of-freedom' | 'no-spread';

/**
 * The weighted fit in coordinates in which the design's columns are orthonormal: a coefficient is a
 * vector there, an estimate a dot product, a variance a quadratic form, and no large matrix is inverted.
 */
export interface LadderFit {
  rank: number;
  df: number;
  level: number;
  gap: LadderGap | null;
  residualVariance: number | null;
  /** Coordinates of column j of the design; zero out of the basis. */
  axis: Float64Array[];
  /** Coordinates of each contact's design row, row-major contacts by rank. */
  rowAxes: Float64Array;
  fitted: Float64Array;
  /** Sum of w r over the rows of each entry (see LadderData). */
  entryScore: Float64Array;
  /** Weight times squared length of each contact's row; together they are the rank. */
  leverage: Float64Array;
  /** C/(C-1) * (n-1)/(n-coefficients), 0 where there is a gap. */
  factor: (coefficients: number) => number;
  estimate(axis: Float64Array, solid: boolean): LadderEstimate;
  /** CR1 covariance of two combinations. */
  covariance(a: Float64Array, b: Float64Array): number;
  /** An estimate from its value and variances; no error where the variance is nothing but rounding. */
  result(estimate: number, variance: number, naiveVariance: number, solid: boolean): LadderEstimate;
}

/** Coordinates of the columns and contact rows: QR of the contacts' weighted design, O(contacts * rank^2). */
function orthonormal(data: LadderData, { inBasis }: SweptGram) {
  const { contacts, columns, weight } = data;
  const basis = Array.from(inBasis.keys()).filter((j) => inBasis[j] === 1);
  const dense = basis.map(() => new Float64Array(contacts));
  const placeOf = new Map(basis.map((j, place) => [j, place]));
  for (let at = 0; at < columns.length; at++) {
    const place = placeOf.get(columns[at]!);
    if (place === undefined) continue;
    const t = at >> 2;
    dense[place]![t]! += (at & 1 ? -1 : 1) * Math.sqrt(weight[t]!);
  }
  const lengths = dense.map((column) => Math.sqrt(dot(column, column)));
  dense.forEach((column, place) => column.forEach((value, t) => (column[t] = value / lengths[place]!)));
  const qr = pivotedQr(dense, 0);
  const rank = qr.rank;
  const axis: Float64Array[] = Array.from(inBasis, () => new Float64Array(rank));
  qr.order.slice(0, rank).forEach((place, position) => {
    const unit = new Float64Array(rank);
    unit[position] = 1 / lengths[place]!;
    axis[basis[place]!] = solveLower(qr, unit);
  });
  const rowAxes = new Float64Array(contacts * rank);
  for (let at = 0; at < columns.length; at++) {
    const own = axis[columns[at]!];
    if (!own) continue;
    const sign = at & 1 ? -1 : 1;
    const from = (at >> 2) * rank;
    for (let c = 0; c < rank; c++) rowAxes[from + c]! += sign * own[c]!;
  }
  return { rank, axis, rowAxes };
}

export function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}

/** Dot product with the coordinates of contact t. */
export function dotRow(rowAxes: Float64Array, rank: number, t: number, vector: Float64Array): number {
  let sum = 0;
  const from = t * rank;
  for (let c = 0; c < rank; c++) sum += rowAxes[from + c]! * vector[c]!;
  return sum;
}

/** Sum over clusters of the products of their scores, rank by rank, without any factor. */
function meatOf(
  data: LadderData,
  rank: number,
  rowAxes: Float64Array,
  entryScore: Float64Array,
): Float64Array<ArrayBuffer> {
  const { starts, entryContact, clusters } = data;
  const meat = new Float64Array(rank * rank);
  const score = new Float64Array(rank);
  for (let g = 0; g < clusters; g++) {
    score.fill(0);
    for (let entry = starts[g]!; entry < starts[g + 1]!; entry++) {
      const rest = entryScore[entry]!;
      const from = entryContact[entry]! * rank;
      for (let c = 0; c < rank; c++) score[c]! += rest * rowAxes[from + c]!;
    }
    for (let c = 0; c < rank; c++) {
      const own = score[c]!;
      for (let d = 0; d <= c; d++) meat[c * rank + d]! += own * score[d]!;
    }
  }
  for (let c = 0; c < rank; c++) for (let d = 0; d < c; d++) meat[d * rank + c] = meat[c * rank + d]!;
  return meat;
}

/**
 * Weighted least squares of the contacts' means with CR1 covariance. O(entries * rank + clusters * rank^2).
 */
export function fitLadder(data: LadderData, swept: SweptGram, level: number): LadderFit {
  const { contacts, weight, mean, n, clusters } = data;
  const { rank, axis, rowAxes } = orthonormal(data, swept);
  const solution = new Float64Array(rank);
  const fitted = new Float64Array(contacts);
  // The second round takes out what rounding left of the first.
  for (let round = 0; round < 2; round++) {
    for (let t = 0; t < contacts; t++) {
      const rest = weight[t]! * (mean[t]! - fitted[t]!);
      for (let c = 0; c < rank; c++) solution[c]! += rest * rowAxes[t * rank + c]!;
    }
    for (let t = 0; t < contacts; t++) fitted[t] = dotRow(rowAxes, rank, t, solution);
  }
  const { entryContact, entryWeight, entrySum } = data;
  const entryScore = new Float64Array(entrySum.length);
  for (let e = 0; e < entrySum.length; e++) {
    entryScore[e] = entrySum[e]! - entryWeight[e]! * fitted[entryContact[e]!]!;
  }
  let squares = data.squaresWithin;
  let total = 0;
  const leverage = new Float64Array(contacts);
  for (let t = 0; t < contacts; t++) {
    squares += weight[t]! * (mean[t]! - fitted[t]!) ** 2;
    total += weight[t]!;
    let length = 0;
    for (let c = 0; c < rank; c++) length += rowAxes[t * rank + c]! ** 2;
    leverage[t] = weight[t]! * length;
  }
  const gap: LadderGap | null =
    clusters < 2
      ? 'one-cluster'
      : n <= rank
        ? 'no-degrees-of-freedom'
        : squares <= total * (1e-12 * data.reach) ** 2
          ? 'no-spread'
          : null;
  const factor = (coefficients: number) =>
    gap || n <= coefficients ? 0 : (clusters / (clusters - 1)) * ((n - 1) / (n - coefficients));
  const residualVariance = n > rank ? squares / (n - rank) : null;
  const df = clusters - 1;
  const quantile = gap ? 0 : tUpperQuantile((1 - level) / 2, df);
  const meat = gap ? null : meatOf(data, rank, rowAxes, entryScore).map((value) => value * factor(rank));

  const covariance = (a: Float64Array, b: Float64Array) => {
    if (!meat) return 0;
    let sum = 0;
    for (let c = 0; c < rank; c++) sum += a[c]! * dotRow(meat, rank, c, b);
    return sum;
  };
  const result: LadderFit['result'] = (estimate, variance, naiveVariance, solid) => {
    if (!solid || gap || !(variance > 1e-12 * naiveVariance))
      return { estimate, se: null, interval: null, p: null };
    const se = Math.sqrt(variance);
    const reach = quantile * se;
    return { estimate, se, interval: [estimate - reach, estimate + reach], p: tTwoSided(estimate / se, df) };
  };
  return {
    ...{ rank, df, level, gap, residualVariance, axis, rowAxes, fitted, entryScore, leverage, factor },
    ...{ covariance, result },
    estimate: (own, solid) =>
      result(dot(own, solution), covariance(own, own), (residualVariance ?? 0) * dot(own, own), solid),
  };
}
