/** Rows folded in at a time: small enough that a block of a few columns stays in the processor's cache. */
const blockRows = 256;

/**
 * The triangular factor of a tall matrix, and Q' times one further column, in one pass over the rows.
 *
 * Blocks of rows are folded into the triangle by Householder reflections (sequential tall-skinny QR;
 * Golub and Van Loan, Matrix Computations, 12.5; Demmel, Grigori, Hoemmen and Langou 2012). As accurate as
 * QR of the whole, but the data are read once and not copied. Time O(n m^2), memory O(m^2 + m * 256).
 *
 * @param columns m columns of n values
 * @param scales factor for each column
 * @param last the further column
 * @param rowScale factor for each row, all 1 when null
 * @returns row-major m by (m + 1): the triangle, then Q' last
 */
export function triangularFactor(
  columns: readonly Float64Array[],
  scales: readonly number[],
  last: Float64Array,
  rowScale: Float64Array | null,
): Float64Array {
  const m = columns.length;
  const width = m + 1;
  const n = last.length;
  const r = new Float64Array(m * width);
  const block = new Float64Array(width * blockRows);
  for (let start = 0; start < n; start += blockRows) {
    const rows = Math.min(blockRows, n - start);
    for (let j = 0; j < width; j++) {
      const column = j < m ? columns[j]! : last;
      const scale = j < m ? scales[j]! : 1;
      const offset = j * blockRows;
      if (rowScale) {
        for (let i = 0; i < rows; i++) block[offset + i] = column[start + i]! * scale * rowScale[start + i]!;
      } else for (let i = 0; i < rows; i++) block[offset + i] = column[start + i]! * scale;
    }
    for (let k = 0; k < m; k++) foldColumn(r, block, k, width, rows);
  }
  return r;
}

/** One reflection: row k of the triangle takes up column k of the block. */
function foldColumn(r: Float64Array, block: Float64Array, k: number, width: number, rows: number): void {
  const own = k * blockRows;
  let squares = 0;
  for (let i = 0; i < rows; i++) squares += block[own + i]! * block[own + i]!;
  if (squares === 0) return;
  const first = r[k * width + k]!;
  const norm = Math.sqrt(first * first + squares);
  // The sign that adds, so that the first entry is not lost to cancellation.
  const diagonal = first > 0 ? -norm : norm;
  const head = first - diagonal;
  const scale = -1 / (diagonal * head);
  r[k * width + k] = diagonal;
  // Two columns at a time: their sums do not wait for each other in the processor.
  let j = k + 1;
  for (; j + 1 < width; j += 2) {
    const one = j * blockRows;
    const two = one + blockRows;
    let dotOne = head * r[k * width + j]!;
    let dotTwo = head * r[k * width + j + 1]!;
    for (let i = 0; i < rows; i++) {
      const value = block[own + i]!;
      dotOne += value * block[one + i]!;
      dotTwo += value * block[two + i]!;
    }
    const factorOne = dotOne * scale;
    const factorTwo = dotTwo * scale;
    r[k * width + j]! -= factorOne * head;
    r[k * width + j + 1]! -= factorTwo * head;
    for (let i = 0; i < rows; i++) {
      const value = block[own + i]!;
      block[one + i]! -= factorOne * value;
      block[two + i]! -= factorTwo * value;
    }
  }
  for (; j < width; j++) {
    const other = j * blockRows;
    let dot = head * r[k * width + j]!;
    for (let i = 0; i < rows; i++) dot += block[own + i]! * block[other + i]!;
    const factor = dot * scale;
    r[k * width + j]! -= factor * head;
    for (let i = 0; i < rows; i++) block[other + i]! -= factor * block[own + i]!;
  }
}
