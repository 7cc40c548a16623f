/**
 * QR factorisation with column pivoting by Householder reflections, for small matrices.
 *
 * Source: Businger and Golub (1965), Numer. Math. 7, 269-276; Golub and Van Loan, Matrix Computations, 5.4.
 * Time O(n m^2), memory O(m^2) beside the columns, which are overwritten.
 */
export interface PivotedQr {
  /** Columns that are independent of those before them; they come first in `order`. */
  rank: number;
  /** order[k] = original index of the column in position k. */
  order: number[];
  /** Upper triangle, row-major m by m, in pivoted order; rows from `rank` on are zero. */
  r: Float64Array;
  /** Overwrites the vector with Q' times it. */
  applyTransposed(vector: Float64Array): void;
}

function tailNorm(column: Float64Array, from: number): number {
  let sum = 0;
  for (let i = from; i < column.length; i++) sum += column[i]! * column[i]!;
  return Math.sqrt(sum);
}

/** vector -= v * (2 v'vector / v'v) over rows from `from` on. */
function reflect(v: Float64Array, from: number, scale: number, vector: Float64Array): void {
  let dot = 0;
  for (let i = from; i < v.length; i++) dot += v[i]! * vector[i]!;
  const factor = dot * scale;
  if (factor === 0) return;
  for (let i = from; i < v.length; i++) vector[i]! -= factor * v[i]!;
}

/**
 * @param columns m columns of n values, of comparable scale (about unit norm or less); overwritten
 * @param tolerance a column whose part independent of the others has a norm at or below this is dependent
 */
export function pivotedQr(columns: Float64Array[], tolerance: number): PivotedQr {
  const m = columns.length;
  const n = columns[0]?.length ?? 0;
  const work = [...columns];
  const order = work.map((_, j) => j);
  const norms = work.map((column) => tailNorm(column, 0));
  const fresh = [...norms];
  const scales: number[] = [];
  const r = new Float64Array(m * m);
  let rank = 0;
  const swap = <T>(list: T[], i: number, j: number) => {
    [list[i], list[j]] = [list[j]!, list[i]!];
  };
  while (rank < Math.min(m, n)) {
    let best = rank;
    for (let j = rank + 1; j < m; j++) if (norms[j]! > norms[best]!) best = j;
    if (!(norms[best]! > tolerance)) break;
    for (const list of [order, norms, fresh]) swap(list, rank, best);
    swap(work, rank, best);
    for (let row = 0; row < rank; row++) {
      const a = row * m + rank;
      const b = row * m + best;
      [r[a], r[b]] = [r[b]!, r[a]!];
    }
    const v = work[rank]!;
    const norm = tailNorm(v, rank);
    // The sign that adds, so that the first entry is not lost to cancellation.
    const diagonal = v[rank]! > 0 ? -norm : norm;
    v[rank]! -= diagonal;
    // v'v / 2 = norm^2 - diagonal * original first entry = -diagonal * v[rank]
    const scale = -1 / (diagonal * v[rank]!);
    scales.push(scale);
    r[rank * m + rank] = diagonal;
    for (let j = rank + 1; j < m; j++) {
      const column = work[j]!;
      reflect(v, rank, scale, column);
      const entry = column[rank]!;
      r[rank * m + j] = entry;
      const rest = norms[j]! * norms[j]! - entry * entry;
      // Subtracting is cheap but forgets digits: measure again before they run out.
      if (rest > 1e-4 * fresh[j]! * fresh[j]!) norms[j] = Math.sqrt(rest);
      else norms[j] = fresh[j] = tailNorm(column, rank + 1);
    }
    rank += 1;
  }
  return {
    rank,
    order,
    r,
    applyTransposed(vector) {
      for (let k = 0; k < rank; k++) reflect(work[k]!, k, scales[k]!, vector);
    },
  };
}

/** Solves R' x = b for the leading `rank` rows and columns; b is not changed. */
export function solveLower({ r, rank, order }: PivotedQr, b: ArrayLike<number>): Float64Array {
  const m = order.length;
  const x = new Float64Array(rank);
  for (let i = 0; i < rank; i++) {
    let sum = b[i]!;
    for (let j = 0; j < i; j++) sum -= r[j * m + i]! * x[j]!;
    x[i] = sum / r[i * m + i]!;
  }
  return x;
}

/** Solves R x = b for the leading `rank` rows and columns; b is not changed. */
export function solveUpper({ r, rank, order }: PivotedQr, b: ArrayLike<number>): Float64Array {
  const m = order.length;
  const x = new Float64Array(rank);
  for (let i = rank - 1; i >= 0; i--) {
    let sum = b[i]!;
    for (let j = i + 1; j < rank; j++) sum -= r[i * m + j]! * x[j]!;
    x[i] = sum / r[i * m + i]!;
  }
  return x;
}

/** (R'R)^-1 of the leading block, row-major rank by rank, in pivoted order. */
export function inverseGram(qr: PivotedQr): Float64Array {
  const { rank } = qr;
  const inverse = Array.from({ length: rank }, (_, j) => {
    const unit = new Float64Array(rank);
    unit[j] = 1;
    return solveUpper(qr, unit);
  });
  const gram = new Float64Array(rank * rank);
  for (let i = 0; i < rank; i++) {
    for (let j = 0; j < rank; j++) {
      let sum = 0;
      for (const column of inverse) sum += column[i]! * column[j]!;
      gram[i * rank + j] = sum;
    }
  }
  return gram;
}
