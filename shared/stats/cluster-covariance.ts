import type { CheckedClusters } from './cluster-ids.ts';
import type { CheckedDesign } from './design.ts';
import type { LeastSquares } from './least-squares.ts';

/** Cell of each row in the order of the clusters; empty without cells. */
export function inClusterOrder({ cells }: CheckedDesign, { order }: CheckedClusters): Int32Array {
  if (!cells) return new Int32Array(0);
  const ordered = new Int32Array(order.length);
  for (let at = 0; at < order.length; at++) ordered[at] = cells[order[at]!]!;
  return ordered;
}

/** Sum of a b over the rows of each cluster. */
function sumByCluster(a: Float64Array, b: Float64Array, ids: Int32Array, size: number): Float64Array {
  const sums = new Float64Array(size);
  for (let i = 0; i < ids.length; i++) sums[ids[i]!]! += a[i]! * b[i]!;
  return sums;
}

/**
 * Sum over clusters of the squared influence of the cluster on the coefficients, without any factor:
 * bread * meat * bread of the sandwich.
 *
 * Cluster g moves the dense slopes by phi_g = (Z'WZ)^-1 sum of w r z over its rows (z centred in its
 * cell), and cell c by a_gc - mean_c' phi_g with a_gc = (sum of w r over its rows in c) / W_c. A cluster
 * touches few cells, so the products of a_gc are few. Time O(n m + clusters (m^2 + t^2 + t m)), t the cells a cluster
 * touches, m the dense columns; memory O(k^2 + clusters m).
 *
 * @returns row-major k by k, rows and columns of dependent coefficients zero
 */
export function clusterSandwich(
  design: CheckedDesign,
  fit: LeastSquares,
  weights: Float64Array | null,
  clusters: CheckedClusters,
  cellsInOrder: Int32Array = inClusterOrder(design, clusters),
): Float64Array {
  const { cells, cellCount } = design;
  const { residuals, basis, inverse, centred, cellMeans, cellWeights } = fit;
  const k = fit.solution.length;
  const m = basis.length;
  const { ids, size, order, starts } = clusters;
  const scores = weights ? residuals.map((value, i) => value * weights[i]!) : residuals;

  const sums = basis.map((j) => sumByCluster(scores, centred[j]!, ids, size));
  const influence = new Float64Array(size * m);
  const slopes = new Float64Array(m * m);
  for (let g = 0; g < size; g++) {
    for (let a = 0; a < m; a++) {
      let value = 0;
      for (let b = 0; b < m; b++) value += inverse[a * m + b]! * sums[b]![g]!;
      influence[g * m + a] = value;
    }
    for (let a = 0; a < m; a++) {
      for (let b = 0; b < m; b++) slopes[a * m + b]! += influence[g * m + a]! * influence[g * m + b]!;
    }
  }

  const covariance = new Float64Array(k * k);
  for (let a = 0; a < m; a++) {
    for (let b = 0; b < m; b++) {
      covariance[(cellCount + basis[a]!) * k + cellCount + basis[b]!] = slopes[a * m + b]!;
    }
  }
  if (!cells) return covariance;

  // Products of the cells' own parts, and of those with the slopes' part.
  const mixed = new Float64Array(cellCount * m);
  const own = new Float64Array(cellCount);
  // Amounts of the cells one cluster touches, in the order of `touched`.
  const amounts = new Float64Array(cellCount);
  const touched = new Int32Array(cellCount);
  const isTouched = new Uint8Array(cellCount);
  for (let g = 0; g < size; g++) {
    let count = 0;
    for (let at = starts[g]!; at < starts[g + 1]!; at++) {
      const c = cellsInOrder[at]!;
      if (c === cellCount) continue;
      if (isTouched[c] === 0) {
        isTouched[c] = 1;
        touched[count++] = c;
      }
      own[c]! += scores[order[at]!]!;
    }
    for (let p = 0; p < count; p++) {
      const c = touched[p]!;
      const amount = own[c]! / cellWeights[c]!;
      amounts[p] = amount;
      own[c] = 0;
      isTouched[c] = 0;
      // Each pair once, in whichever triangle it falls: both are added up below.
      const row = c * k;
      for (let q = 0; q <= p; q++) covariance[row + touched[q]!]! += amount * amounts[q]!;
      for (let a = 0; a < m; a++) mixed[c * m + a]! += amount * influence[g * m + a]!;
    }
  }
  for (let c = 0; c < cellCount; c++) {
    for (let d = 0; d < c; d++) {
      const sum = covariance[c * k + d]! + covariance[d * k + c]!;
      covariance[c * k + d] = covariance[d * k + c] = sum;
    }
  }
  // Means of the independent columns per cell, and those times the slopes' covariance.
  const means = new Float64Array(cellCount * m);
  const carried = new Float64Array(cellCount * m);
  for (let c = 0; c < cellCount; c++) {
    for (let a = 0; a < m; a++) means[c * m + a] = cellMeans[basis[a]!]![c]!;
    for (let a = 0; a < m; a++) {
      let value = 0;
      for (let b = 0; b < m; b++) value += slopes[a * m + b]! * means[c * m + b]!;
      carried[c * m + a] = value;
      const cross = mixed[c * m + a]! - value;
      covariance[c * k + cellCount + basis[a]!] = cross;
      covariance[(cellCount + basis[a]!) * k + c] = cross;
    }
  }
  for (let c = 0; c < cellCount; c++) {
    for (let d = 0; d < cellCount; d++) {
      let value = 0;
      for (let a = 0; a < m; a++) {
        value +=
          means[d * m + a]! * (carried[c * m + a]! - mixed[c * m + a]!) -
          means[c * m + a]! * mixed[d * m + a]!;
      }
      covariance[c * k + d]! += value;
    }
  }
  return covariance;
}

/** Diagonal of (X'WX)^-1, zero for dependent coefficients and empty cells. */
export function inverseDiagonal(design: CheckedDesign, fit: LeastSquares): Float64Array {
  const { basis, inverse, cellMeans, cellWeights } = fit;
  const m = basis.length;
  const diagonal = new Float64Array(fit.solution.length);
  basis.forEach((j, a) => (diagonal[design.cellCount + j] = inverse[a * m + a]!));
  for (let c = 0; c < design.cellCount; c++) {
    if (cellWeights[c] === 0) continue;
    let value = 1 / cellWeights[c]!;
    for (let a = 0; a < m; a++) {
      for (let b = 0; b < m; b++) {
        value += cellMeans[basis[a]!]![c]! * inverse[a * m + b]! * cellMeans[basis[b]!]![c]!;
      }
    }
    diagonal[c] = value;
  }
  return diagonal;
}

/** Per coefficient: rows with a value other than zero, and the clusters they belong to. O(n m). */
export function support(
  design: CheckedDesign,
  clustering: CheckedClusters,
  cellsInOrder: Int32Array = inClusterOrder(design, clustering),
): { rows: Int32Array; clusters: Int32Array } {
  const { cellCount, columns } = design;
  const { ids, size, starts } = clustering;
  const rows = new Int32Array(cellCount + columns.length);
  const clusters = new Int32Array(cellCount + columns.length);
  const last = new Int32Array(cellCount).fill(-1);
  for (let g = 0; cellCount > 0 && g < size; g++) {
    for (let at = starts[g]!; at < starts[g + 1]!; at++) {
      const c = cellsInOrder[at]!;
      if (c === cellCount) continue;
      rows[c]! += 1;
      clusters[c]! += Number(last[c] !== g);
      last[c] = g;
    }
  }
  columns.forEach((column, j) => {
    const held = rowsHeld(column, ids, size);
    for (let g = 0; g < size; g++) {
      rows[cellCount + j]! += held[g]!;
      if (held[g]! > 0) clusters[cellCount + j]! += 1;
    }
  });
  return { rows, clusters };
}

/** Rows with a value other than zero, per cluster; without a branch, since zeros come at random. */
function rowsHeld(column: Float64Array, ids: Int32Array, size: number): Int32Array {
  const held = new Int32Array(size);
  for (let i = 0; i < ids.length; i++) held[ids[i]!]! += Number(column[i] !== 0);
  return held;
}
