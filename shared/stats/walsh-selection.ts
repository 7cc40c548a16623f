import { createRandom, type Random } from './random.ts';

/**
 * Order statistics of the n (n + 1) / 2 Walsh averages (x_i + x_j) / 2, i <= j, without listing them.
 *
 * With x sorted, row i of the implicit matrix (columns j >= i) increases along j, and every column
 * increases along i. So the cells at most v form a staircase that two pointers walk in O(n), and what
 * is still a candidate in row i is one run of columns. Each round draws a random sample of the
 * candidates, takes two pivots just below and above the wanted rank, and cuts the runs; when few
 * candidates are left they are listed and sorted.
 *
 * Sources: Johnson and Mizoguchi (1978), SIAM J. Comput. 7, 147-153 (staircase in X + Y); Monahan
 * (1984), ACM TOMS 10, 265-270 (random pivots for the Hodges-Lehmann estimator); Floyd and Rivest
 * (1975), CACM 18, 165-172 (two pivots from a sample). Expected O(n log n) for any data, ties
 * included; memory O(n).
 */
export interface WalshMatrix {
  /** Halves of the data in increasing order: cell (i, j) is half[i] + half[j], which cannot overflow. */
  half: Float64Array;
  size: number;
}

/** @param values finite numbers; copied, not changed */
export function walshMatrix(values: ArrayLike<number>): WalshMatrix {
  // Adding zero turns minus zero into zero.
  const half = Float64Array.from(values, (value) => value / 2 + 0).sort();
  return { half, size: (half.length * (half.length + 1)) / 2 };
}

/** Per row the first column whose cell exceeds v (`strict` false) or is at least v (`strict` true). */
function staircase({ half }: WalshMatrix, v: number, strict: boolean, ends: Int32Array): number {
  const n = half.length;
  let column = n;
  let count = 0;
  for (let i = 0; i < n; i++) {
    const own = half[i]!;
    if (strict) while (column > i && own + half[column - 1]! >= v) column -= 1;
    else while (column > i && own + half[column - 1]! > v) column -= 1;
    if (column <= i) {
      // No cell of this row or of any later one is small enough.
      for (let rest = i; rest < n; rest++) ends[rest] = rest;
      break;
    }
    ends[i] = column;
    count += column - i;
  }
  return count;
}

interface Candidates {
  /** Row i still holds columns from[i] to to[i] - 1. */
  from: Int32Array;
  to: Int32Array;
  /** Cells cut off below. */
  below: number;
  count: number;
}

/** About `wanted` candidates, one at a random place in each equal stretch of them, in increasing order. */
function sample(
  { half }: WalshMatrix,
  { from, to, count }: Candidates,
  wanted: number,
  random: Random,
): Float64Array {
  const drawn = new Float64Array(wanted);
  const stretch = count / wanted;
  let taken = 0;
  let place = random.uniform() * stretch;
  let passed = 0;
  for (let i = 0; i < from.length && taken < wanted; i++) {
    const width = to[i]! - from[i]!;
    while (taken < wanted && place < passed + width) {
      drawn[taken] = half[i]! + half[from[i]! + Math.min(width - 1, Math.floor(place - passed))]!;
      taken += 1;
      place = (taken + random.uniform()) * stretch;
    }
    passed += width;
  }
  return drawn.subarray(0, taken).sort();
}

function listed({ half }: WalshMatrix, { from, to, count }: Candidates): Float64Array {
  const all = new Float64Array(count);
  let next = 0;
  for (let i = 0; i < from.length; i++) {
    for (let j = from[i]!; j < to[i]!; j++) all[next++] = half[i]! + half[j]!;
  }
  return all.sort();
}

/**
 * The rank-th smallest Walsh average, rank = 1 ... size.
 *
 * @throws RangeError when rank is not a whole number in that range
 */
export function selectWalsh(matrix: WalshMatrix, rank: number): number {
  const n = matrix.half.length;
  if (!Number.isInteger(rank) || rank < 1 || rank > matrix.size) {
    throw new RangeError(`rank must be a whole number from 1 to ${matrix.size}, got ${rank}`);
  }
  // A fixed seed: the answer does not depend on it, only the time does.
  const random = createRandom(n);
  const candidates: Candidates = {
    from: Int32Array.from({ length: n }, (_, i) => i),
    to: new Int32Array(n).fill(n),
    below: 0,
    count: matrix.size,
  };
  const few = Math.max(2000, n >> 2);
  let ends: Int32Array = new Int32Array(n);

  /** Cuts at the pivot and says where the wanted value lies from it. */
  const cut = (pivot: number): 'here' | 'above' | 'below' => {
    const atMost = staircase(matrix, pivot, false, ends);
    if (atMost < rank) {
      [candidates.from, ends] = [ends, candidates.from];
      candidates.count -= atMost - candidates.below;
      candidates.below = atMost;
      return 'above';
    }
    const smaller = staircase(matrix, pivot, true, ends);
    if (smaller < rank) return 'here';
    [candidates.to, ends] = [ends, candidates.to];
    candidates.count = smaller - candidates.below;
    return 'below';
  };

  while (candidates.count > few) {
    const drawn = sample(matrix, candidates, Math.min(10_000, Math.max(200, n >> 3)), random);
    const centre = ((rank - candidates.below) / candidates.count) * drawn.length;
    const spread = 2 + 1.5 * Math.sqrt((centre * (drawn.length - centre)) / drawn.length);
    const lower = drawn[Math.max(0, Math.floor(centre - spread))]!;
    const upper = drawn[Math.min(drawn.length - 1, Math.ceil(centre + spread))]!;
    const fromLower = cut(lower);
    if (fromLower === 'here') return lower;
    if (fromLower === 'above' && upper > lower && cut(upper) === 'here') return upper;
  }
  return listed(matrix, candidates)[rank - candidates.below - 1]!;
}

/** The smallest Walsh average above v, or null when there is none. O(n). */
export function nextWalsh(matrix: WalshMatrix, v: number): number | null {
  const { half } = matrix;
  const ends = new Int32Array(half.length);
  staircase(matrix, v, false, ends);
  let next = Infinity;
  for (let i = 0; i < half.length; i++) {
    if (ends[i]! < half.length) next = Math.min(next, half[i]! + half[ends[i]!]!);
  }
  return next === Infinity ? null : next;
}

/** How many Walsh averages are at most v. O(n). */
export function countWalshAtMost(matrix: WalshMatrix, v: number): number {
  return staircase(matrix, v, false, new Int32Array(matrix.half.length));
}
