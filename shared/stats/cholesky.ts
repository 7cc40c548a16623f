/**
 * Cholesky factors of small symmetric positive definite matrices, row-major d by d.
 *
 * Source: Golub and Van Loan, Matrix Computations, 4.2. Time O(d^3).
 */

/** Lower triangle L with L L' = matrix; null when the matrix is not safely positive definite. */
export function choleskyFactor(matrix: Float64Array, d: number): Float64Array | null {
  const factor = new Float64Array(d * d);
  for (let j = 0; j < d; j++) {
    let pivot = matrix[j * d + j]!;
    for (let k = 0; k < j; k++) pivot -= factor[j * d + k]! ** 2;
    // What is left of the diagonal must stand clear of its rounding error.
    if (!(pivot > 1e-14 * matrix[j * d + j]!)) return null;
    const root = Math.sqrt(pivot);
    factor[j * d + j] = root;
    for (let i = j + 1; i < d; i++) {
      let value = matrix[i * d + j]!;
      for (let k = 0; k < j; k++) value -= factor[i * d + k]! * factor[j * d + k]!;
      factor[i * d + j] = value / root;
    }
  }
  return factor;
}

/** x with L L' x = b. */
export function choleskySolve(factor: Float64Array, b: ArrayLike<number>): Float64Array {
  const d = b.length;
  const x = Float64Array.from(b);
  for (let i = 0; i < d; i++) {
    for (let k = 0; k < i; k++) x[i]! -= factor[i * d + k]! * x[k]!;
    x[i]! /= factor[i * d + i]!;
  }
  for (let i = d - 1; i >= 0; i--) {
    for (let k = i + 1; k < d; k++) x[i]! -= factor[k * d + i]! * x[k]!;
    x[i]! /= factor[i * d + i]!;
  }
  return x;
}

/** (L L')^-1, row-major. */
export function choleskyInverse(factor: Float64Array, d: number): Float64Array {
  const inverse = new Float64Array(d * d);
  for (let j = 0; j < d; j++) {
    const unit = new Float64Array(d);
    unit[j] = 1;
    inverse.set(choleskySolve(factor, unit), j * d);
  }
  return inverse;
}
