import type { CheckedDesign } from './design.ts';
import { inverseGram, pivotedQr, solveUpper } from './pivoted-qr.ts';

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

/** Subtracts the weighted cell means, twice, so that their rounding error goes too; returns the means. */
function centre(values: Float64Array, cells: Int32Array, weights: Float64Array | null, totals: Float64Array) {
  const means = new Float64Array(totals.length);
  const step = new Float64Array(totals.length);
  for (let pass = 0; pass < 2; pass++) {
    step.fill(0);
    if (weights) for (let i = 0; i < values.length; i++) step[cells[i]!]! += weights[i]! * values[i]!;
    else for (let i = 0; i < values.length; i++) step[cells[i]!]! += values[i]!;
    for (let c = 0; c < step.length; c++) {
      if (totals[c]! > 0) step[c]! /= totals[c]!;
      means[c]! += step[c]!;
    }
    for (let i = 0; i < values.length; i++) values[i]! -= step[cells[i]!]!;
  }
  return means;
}

/** Euclidean length with the weights. */
function length(values: Float64Array, weights: Float64Array | null): number {
  let sum = 0;
  if (weights) for (let i = 0; i < values.length; i++) sum += weights[i]! * values[i]! * values[i]!;
  else for (let i = 0; i < values.length; i++) sum += values[i]! * values[i]!;
  return Math.sqrt(sum);
}

const largest = (values: Float64Array) => {
  let most = 0;
  for (let i = 0; i < values.length; i++) most = Math.max(most, Math.abs(values[i]!));
  return most;
};

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
 * columns are factored (pivoted QR), and the cell values follow (Frisch and Waugh 1933; Lovell 1963).
 * One step of iterative refinement (Bjorck 1996, 2.9). Time O(n m^2) for m dense columns, whatever the number of
 * cells; memory O(n m).
 */
export function leastSquares(
  design: CheckedDesign,
  y: Float64Array,
  weights: Float64Array | null,
): LeastSquares {
  const { n, cells, cellCount, columns } = design;
  const cellWeights = new Float64Array(cellCount);
  if (cells) for (let i = 0; i < n; i++) cellWeights[cells[i]!]! += weights ? weights[i]! : 1;

  const lengths = columns.map((column) => length(column, weights));
  const centred = columns.map((column) => (cells ? column.slice() : column));
  const cellMeans = cells ? centred.map((column) => centre(column, cells, weights, cellWeights)) : [];
  const residuals = y.slice();
  const cellValues = cells ? centre(residuals, cells, weights, cellWeights) : cellWeights;

  const roots = weights?.map(Math.sqrt) ?? null;
  const scaled = centred.map((column, j) => {
    const scale = lengths[j]! > 0 ? 1 / lengths[j]! : 0;
    return roots ? column.map((value, i) => value * scale * roots[i]!) : column.map((value) => value * scale);
  });
  const qr = pivotedQr(scaled, dependent);
  const { order, rank } = qr;
  const basis = order.slice(0, rank);

  const slopes = new Float64Array(columns.length);
  const right = new Float64Array(n);
  for (let pass = 0; rank > 0 && pass < 2; pass++) {
    right.set(residuals);
    if (roots) for (let i = 0; i < n; i++) right[i]! *= roots[i]!;
    qr.applyTransposed(right);
    const step = solveUpper(qr, right);
    basis.forEach((j, position) => {
      const change = step[position]! / lengths[j]!;
      slopes[j]! += change;
      const column = centred[j]!;
      for (let i = 0; i < n; i++) residuals[i]! -= change * column[i]!;
    });
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

  const reach = [...new Array<number>(cellCount).fill(1), ...columns.map((column) => largest(column) || 1)];
  const nullSpace: number[][] = [];
  for (let c = 0; c < cellCount; c++) {
    if (cellWeights[c] === 0) nullSpace.push(Array.from(solution, (_, j) => (j === c ? 1 : 0)));
  }
  for (let position = rank; position < columns.length; position++) {
    const own = order[position]!;
    const along = solveUpper(
      qr,
      Array.from({ length: rank }, (_, row) => qr.r[row * columns.length + position]!),
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
