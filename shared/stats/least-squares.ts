import type { CheckedDesign } from './design.ts';
import { largestSize } from './arguments.ts';
import { inverseGram, pivotedQr, solveLower, solveUpper } from './pivoted-qr.ts';
import { triangularFactor } from './tall-qr.ts';

/**
 * A dense column counts as dependent when what the other columns leave of it is smaller than this part
 * of its own length.
 */
const dependent = 1e-8;

export interface LeastSquares {
  /** Cells first, then columns; a dependent column (and an empty cell) has the value 0. */
  solution: Float64Array;
  residuals: Float64Array;
  rank: number;
  /** Sum of the weights per cell (rows per cell without weights). */
  cellWeights: Float64Array;
  /** Weighted mean of each dense column per cell, [column][cell]. */
  cellMeans: Float64Array[];
  /** Dense columns less their cell means. */
  centred: Float64Array[];
  /** Indices of the independent dense columns. */
  basis: number[];
  /** (Z'WZ)^-1 of the centred independent columns, row-major, in the order of `basis`. */
  inverse: Float64Array;
  /**
   * Combinations of coefficients that change no fitted value, largest entry 1; one per dependent column
   * and empty cell. Each names the coefficients that one dependent column is tangled with.
   */
  nullSpace: number[][];
}

/**
 * Values less their weighted cell mean, and the means; a second pass removes their rounding error. Rows in
 * no cell (one past the last) stay as they are.
 */
function centre(
  values: Float64Array,
  cells: Int32Array,
  weights: Float64Array | null,
  totals: Float64Array,
): { centred: Float64Array; means: Float64Array } {
  const none = totals.length;
  const means = new Float64Array(none + 1);
  const sums = new Float64Array(none + 1);
  const takeMeans = () => {
    sums[none] = 0;
    for (let c = 0; c < none; c++) {
      if (totals[c]! > 0) sums[c]! /= totals[c]!;
      means[c]! += sums[c]!;
    }
  };
  if (weights) for (let i = 0; i < values.length; i++) sums[cells[i]!]! += weights[i]! * values[i]!;
  else for (let i = 0; i < values.length; i++) sums[cells[i]!]! += values[i]!;
  takeMeans();
  const first = means.slice();
  sums.fill(0);
  const centred = new Float64Array(values.length);
  for (let i = 0; i < values.length; i++) {
    const c = cells[i]!;
    const rest = values[i]! - first[c]!;
    centred[i] = rest;
    sums[c]! += weights ? weights[i]! * rest : rest;
  }
  takeMeans();
  // Mostly the first mean was right to the last digit and nothing is left to subtract.
  if (largestSize(sums) > 2 * Number.EPSILON * largestSize(means)) {
    for (let i = 0; i < values.length; i++) centred[i]! -= sums[cells[i]!]!;
  }
  return { centred, means: means.subarray(0, none) };
}

/** Sum of w a b. */
export function weightedDot(a: Float64Array, b: Float64Array, weights: Float64Array | null): number {
  let sum = 0;
  if (weights) for (let i = 0; i < a.length; i++) sum += weights[i]! * a[i]! * b[i]!;
  else for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}

function subtractMultiple(values: Float64Array, factor: number, column: Float64Array): void {
  for (let i = 0; i < values.length; i++) values[i]! -= factor * column[i]!;
}

/** Largest entry 1, rounding noise cleared. */
function tidy(vector: number[], reach: number[]): number[] {
  const felt = vector.map((value, j) => Math.abs(value) * reach[j]!);
  const threshold = 1e-8 * Math.max(...felt);
  const cleared = vector.map((value, j) => (felt[j]! > threshold ? value : 0));
  const top = cleared.reduce(
    (most, value) => (Math.abs(value) > Math.abs(most) * (1 + 1e-9) ? value : most),
    0,
  );
  return cleared.map((value) => value / top || 0);
}

/**
 * (Weighted) least squares on cell indicators and dense columns.
 *
 * The indicators are eliminated exactly: dense columns and y are centred within cells, the few centred
 * columns are factored (QR, then pivoted QR of the triangle), and the cell values follow (Frisch and
 * Waugh 1933; Lovell 1963). One step of refinement by corrected seminormal equations (Bjorck 1987). Time O(n m^2) for m dense columns, whatever the number of
 * cells; memory O(n m).
 */
export function leastSquares(
  design: CheckedDesign,
  y: Float64Array,
  weights: Float64Array | null,
): LeastSquares {
  const { n, cells, cellCount, columns } = design;
  // One more than the cells: rows in none.
  const allWeights = new Float64Array(cellCount + 1);
  if (cells) for (let i = 0; i < n; i++) allWeights[cells[i]!]! += weights ? weights[i]! : 1;
  const cellWeights = allWeights.subarray(0, cellCount);

  const lengths = columns.map((column) => Math.sqrt(weightedDot(column, column, weights)));
  const parts = cells ? columns.map((column) => centre(column, cells, weights, cellWeights)) : null;
  const centred = parts ? parts.map((part) => part.centred) : columns;
  const cellMeans = parts ? parts.map((part) => part.means) : [];
  const { centred: residuals, means: cellValues } = cells
    ? centre(y, cells, weights, cellWeights)
    : { centred: y.slice(), means: cellWeights };

  const scales = lengths.map((own) => (own > 0 ? 1 / own : 0));
  const m = columns.length;
  const factor = triangularFactor(centred, scales, residuals, weights && weights.map(Math.sqrt));
  const triangle = Array.from({ length: m }, (_, j) =>
    Float64Array.from({ length: m }, (__, i) => factor[i * (m + 1) + j]!),
  );
  const qr = pivotedQr(triangle, dependent);
  const { order, rank } = qr;
  const basis = order.slice(0, rank);

  const slopes = new Float64Array(m);
  const follow = (step: Float64Array) => {
    basis.forEach((j, position) => {
      const change = step[position]! * scales[j]!;
      slopes[j]! += change;
      subtractMultiple(residuals, change, centred[j]!);
    });
  };
  if (rank > 0) {
    const right = Float64Array.from({ length: m }, (_, i) => factor[i * (m + 1) + m]!);
    qr.applyTransposed(right);
    follow(solveUpper(qr, right));
    const left = basis.map((j) => weightedDot(centred[j]!, residuals, weights) * scales[j]!);
    follow(solveUpper(qr, solveLower(qr, left)));
  }

  const solution = new Float64Array(cellCount + columns.length);
  for (let c = 0; c < cellCount; c++) {
    let value = cellValues[c]!;
    for (const j of basis) value -= cellMeans[j]![c]! * slopes[j]!;
    solution[c] = value;
  }
  solution.set(slopes, cellCount);

  const inverse = inverseGram(qr);
  for (let a = 0; a < rank; a++) {
    for (let b = 0; b < rank; b++) inverse[a * rank + b]! /= lengths[basis[a]!]! * lengths[basis[b]!]!;
  }

  const reach = [
    ...new Array<number>(cellCount).fill(1),
    ...columns.map((column) => largestSize(column) || 1),
  ];
  const nullSpace: number[][] = [];
  for (let c = 0; c < cellCount; c++) {
    if (cellWeights[c] === 0) nullSpace.push(Array.from(solution, (_, j) => (j === c ? 1 : 0)));
  }
  for (let position = rank; position < columns.length; position++) {
    const own = order[position]!;
    const along = solveUpper(
      qr,
      Array.from({ length: rank }, (_, row) => qr.r[row * m + position]!),
    );
    const vector = new Array<number>(solution.length).fill(0);
    const put = (j: number, amount: number) => {
      vector[cellCount + j] = amount;
      for (let c = 0; c < cellCount; c++) vector[c]! -= cellMeans[j]![c]! * amount;
    };
    put(own, lengths[own]! > 0 ? 1 / lengths[own]! : 1);
    basis.forEach((j, k) => put(j, -along[k]! / lengths[j]!));
    nullSpace.push(tidy(vector, reach));
  }
  const full = cellWeights.reduce((count, weight) => count + (weight > 0 ? 1 : 0), rank);
  return { solution, residuals, rank: full, cellWeights, cellMeans, centred, basis, inverse, nullSpace };
}
