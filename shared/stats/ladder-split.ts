import { addContact, holds, sweepGram, withoutEachCluster } from './ladder-design.ts';
import type { SweptGram, Terms } from './ladder-design.ts';
import { dot, dotRow } from './ladder-fit.ts';
import type { LadderEstimate, LadderFit } from './ladder-fit.ts';
import type { LadderData } from './ladder-rows.ts';

/** What a pair's own rows say, what all others say, and how far apart the two are. */
export interface LadderSplit {
  direct: LadderEstimate | null;
  indirect: LadderEstimate | null;
  /** direct minus indirect; its p is the test of consistency. */
  inconsistency: LadderEstimate | null;
  /** Weight of the direct part in the whole estimate. */
  directShare: number | null;
}

export interface SplitQuestion {
  data: LadderData;
  fit: LadderFit;
  swept: SweptGram;
  /** Unweighted Gram matrix of the contacts. */
  gram: Float64Array;
  lonely: ReadonlyMap<number, number[]>;
}

const nothing: LadderSplit = { direct: null, indirect: null, inconsistency: null, directShare: null };

/** Squared influences on two estimates, and on their sum, summed over the clusters. */
interface Squares {
  first: number;
  second: number;
  sum: number;
}

/** Numbers a contact in the table of `influenceSquares`: three for each of two splits, padded. */
const stride = 8;
const slots = [0, 4] as const;

/**
 * The clusters' influences for two splits at once. The only part that looks at every entry, and it does so
 * for every pair of antennas: two at a time halve the reading.
 *
 * @param pulls by contact and slot: how far the split moves its fitted value, and what a decibel of one of
 *   its rows does to the two estimates
 */
function influenceSquares(
  { starts, entryContact, entryWeight, clusters }: LadderData,
  entryScore: Float64Array,
  pulls: Float64Array,
): [Squares, Squares] {
  const x: Squares = { first: 0, second: 0, sum: 0 };
  const y: Squares = { first: 0, second: 0, sum: 0 };
  for (let g = 0; g < clusters; g++) {
    const end = starts[g + 1]!;
    let xFirst = 0;
    let xSecond = 0;
    let yFirst = 0;
    let ySecond = 0;
    for (let entry = starts[g]!; entry < end; entry++) {
      const at = stride * entryContact[entry]!;
      const score = entryScore[entry]!;
      const weight = entryWeight[entry]!;
      const xRest = score - weight * pulls[at]!;
      xFirst += xRest * pulls[at + 1]!;
      xSecond += xRest * pulls[at + 2]!;
      const yRest = score - weight * pulls[at + 4]!;
      yFirst += yRest * pulls[at + 5]!;
      ySecond += yRest * pulls[at + 6]!;
    }
    x.first += xFirst * xFirst;
    x.second += xSecond * xSecond;
    x.sum += (xFirst + xSecond) * (xFirst + xSecond);
    y.first += yFirst * yFirst;
    y.second += ySecond * ySecond;
    y.sum += (yFirst + ySecond) * (yFirst + ySecond);
  }
  return [x, y];
}

export interface SplitPair {
  /** Columns of the antennas, the lower id first. */
  a: number;
  b: number;
  /** theta_a - theta_b from all rows. */
  whole: LadderEstimate;
  /** Contacts of the pair. */
  direct: readonly number[];
}

/** A split that waits for its clusters' influences. */
interface Prepared {
  fill(pulls: Float64Array, slot: number): void;
  finish(squares: Squares): LadderSplit;
}

/**
 * Node splitting: the model once more with one column that is 1 in the rows of the pair (a, b). Its
 * coefficient is direct minus indirect, theta_a - theta_b is then the indirect estimate. Source: Dias,
 * Welton, Caldwell and Ades (2010), Statistics in Medicine 29, 932-944; here by least squares.
 *
 * The column is joined to the fit that stands (Frisch, Waugh and Lovell): with m its part at right angles to
 * the design, the coefficient is sum w m y / sum w m^2, and every cluster's influence is a sum of one
 * number a contact. O(entries + contacts * rank) a pair instead of a fit over all rows.
 */
export function splitPairs(question: SplitQuestion, pairs: readonly SplitPair[]): LadderSplit[] {
  const { data, fit } = question;
  const splits = pairs.map((pair) => prepare(question, pair));
  const waiting = splits.flatMap((split, at) => ('fill' in split ? [{ split, at }] : []));
  const done = splits.map((split) => ('fill' in split ? nothing : split));
  const pulls = new Float64Array(stride * data.contacts);
  for (let next = 0; next < waiting.length; next += slots.length) {
    const together = waiting.slice(next, next + slots.length);
    together.forEach(({ split }, i) => split.fill(pulls, slots[i]!));
    const squares = influenceSquares(data, fit.entryScore, pulls);
    together.forEach(({ split, at }, i) => (done[at] = split.finish(squares[i]!)));
  }
  return done;
}

function prepare(
  { data, fit, swept, gram, lonely }: SplitQuestion,
  { a, b, whole, direct }: SplitPair,
): LadderSplit | Prepared {
  if (direct.length === 0) return { ...nothing, indirect: whole };
  const { contacts, columns, weight, mean, n } = data;
  const { rank, rowAxes, fitted } = fit;
  const k = swept.inBasis.length;

  const isDirect = new Uint8Array(contacts);
  for (const t of direct) isDirect[t] = 1;
  const extraOf = (t: number) => (isDirect[t] === 1 ? k : -1);
  const wider = new Float64Array((k + 1) * (k + 1));
  for (let i = 0; i < k; i++) for (let j = 0; j < k; j++) wider[i * (k + 1) + j] = gram[i * k + j]!;
  for (const t of direct) {
    addContact(wider, k + 1, columns, t, 1, k);
    addContact(wider, k + 1, columns, t, -1);
  }
  const joined = sweepGram(wider, k + 1);

  // The column's coordinates in the design, and what they say of theta_a - theta_b.
  const along = new Float64Array(rank);
  for (const t of direct) {
    for (let c = 0; c < rank; c++) along[c]! += weight[t]! * rowAxes[t * rank + c]!;
  }
  const difference = fit.axis[a]!.map((value, c) => value - fit.axis[b]![c]!);
  const directShare = dot(difference, along);
  const delta: Terms = [[k, 1]];
  const antennas: Terms = [
    [a, 1],
    [b, -1],
  ];
  if (!holds(joined, delta)) {
    // Nothing but the pair's own rows, or nothing but the others, carries the estimate.
    if (Math.abs(directShare - 1) < 1e-6) return { ...nothing, direct: whole, directShare: 1 };
    if (Math.abs(directShare) < 1e-6) return { ...nothing, indirect: whole, directShare: 0 };
    return nothing;
  }

  const own = new Float64Array(contacts);
  let length = 0;
  let moment = 0;
  for (let t = 0; t < contacts; t++) {
    own[t] = isDirect[t]! - dotRow(rowAxes, rank, t, along);
    length += weight[t]! * own[t]! ** 2;
    moment += weight[t]! * own[t]! * (mean[t]! - fitted[t]!);
  }
  const apart = moment / length;
  const left = withoutEachCluster(wider, joined, columns, lonely, extraOf);
  const solid = (terms: Terms) => left.every((rest) => holds(rest, terms));
  // One coefficient more than the fit that stands; its residuals are smaller by what the column explains.
  const spare = n - rank - 1;
  const before = (fit.residualVariance ?? 0) * (n - rank);
  const after = before - length * apart * apart;
  const variance = spare > 0 && after > 1e-12 * before ? after / spare : null;
  const factor = fit.factor(rank + 1);
  const naiveDelta = 1 / length;
  const naiveIndirect = dot(difference, difference) + directShare * directShare * naiveDelta;
  const naiveDirect = naiveIndirect + (1 - 2 * directShare) * naiveDelta;
  const indirect = whole.estimate - directShare * apart;
  const result = (estimate: number, squares: number, naive: number, terms: Terms) =>
    fit.result(estimate, factor * squares, (variance ?? 0) * naive, variance !== null && solid(terms));
  return {
    fill(pulls, slot) {
      for (let t = 0; t < contacts; t++) {
        const pull = own[t]! / length;
        const at = stride * t + slot;
        pulls[at] = apart * own[t]!;
        pulls[at + 1] = pull;
        pulls[at + 2] = dotRow(rowAxes, rank, t, difference) - directShare * pull;
      }
    },
    finish: ({ first, second, sum }) => ({
      directShare,
      inconsistency: result(apart, first, naiveDelta, delta),
      indirect: result(indirect, second, naiveIndirect, antennas),
      direct: result(indirect + apart, sum, naiveDirect, [...antennas, ...delta]),
    }),
  };
}
