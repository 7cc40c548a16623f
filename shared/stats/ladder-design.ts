/**
 * Which combinations of antennas and receivers the contacts can tell apart. The weights do not matter for
 * that, so it is asked of the unweighted Gram matrix of the contacts: its entries are small whole
 * numbers, exact in floating point, its order is the number of antennas and receivers, and a pivot is
 * either zero up to rounding or no smaller than about one part in (columns * contacts).
 */

/** What is left of a pivot below this part of its diagonal is rounding. */
const dependent = 1e-9;
const sameEntry = 1e-7;

/** Signs of the four columns of a contact. */
const signs = [1, -1, 1, -1] as const;

export interface SweptGram {
  rank: number;
  /** 1 where the column is independent of those taken before it. */
  inBasis: Uint8Array;
  /** Row-major k by k: the inverse of the basis' block; beside it, in columns out of the basis, their combination. */
  swept: Float64Array;
}

/** Adds `factor` times the products of a contact's design row; `extra` is one more column with a 1, or -1 for none. */
export function addContact(
  gram: Float64Array,
  k: number,
  columns: Int32Array,
  contact: number,
  factor = 1,
  extra = -1,
): void {
  for (let i = 0; i < 5; i++) {
    const row = i === 4 ? extra : columns[4 * contact + i]!;
    if (row < 0) continue;
    for (let j = 0; j < 5; j++) {
      const column = j === 4 ? extra : columns[4 * contact + j]!;
      if (column < 0) continue;
      gram[row * k + column]! += factor * (signs[i] ?? 1) * (signs[j] ?? 1);
    }
  }
}

/**
 * Gauss-Jordan elimination with the largest remaining diagonal first, leaving out dependent columns.
 * Source: Goodnight (1979), A tutorial on the SWEEP operator, The American Statistician 33. O(k^3).
 */
export function sweepGram(gram: Float64Array, k: number): SweptGram {
  const swept = gram.slice();
  const inBasis = new Uint8Array(k);
  let rank = 0;
  for (;;) {
    let best = -1;
    let bestShare = dependent;
    for (let j = 0; j < k; j++) {
      const share = inBasis[j] === 1 || gram[j * k + j] === 0 ? 0 : swept[j * k + j]! / gram[j * k + j]!;
      if (share > bestShare) [best, bestShare] = [j, share];
    }
    if (best < 0) return { rank, inBasis, swept };
    const pivot = swept[best * k + best]!;
    for (let j = 0; j < k; j++) swept[best * k + j]! /= pivot;
    for (let i = 0; i < k; i++) {
      if (i === best) continue;
      const lead = swept[i * k + best]!;
      if (lead === 0) continue;
      for (let j = 0; j < k; j++) swept[i * k + j]! -= lead * swept[best * k + j]!;
      swept[i * k + best] = -lead / pivot;
    }
    swept[best * k + best] = 1 / pivot;
    inBasis[best] = 1;
    rank += 1;
  }
}

/** A sum of coefficients, each with its factor. */
export type Terms = readonly (readonly [column: number, factor: number])[];

/** Whether the data fix a sum of coefficients: no combination in the null space moves it. */
export function holds({ inBasis, swept }: SweptGram, terms: Terms): boolean {
  const k = inBasis.length;
  for (let free = 0; free < k; free++) {
    if (inBasis[free] === 1) continue;
    let moved = 0;
    for (const [row, factor] of terms) {
      moved += factor * (inBasis[row] === 1 ? -swept[row * k + free]! : row === free ? 1 : 0);
    }
    if (Math.abs(moved) > sameEntry) return false;
  }
  return true;
}

/** Whether the data can tell two coefficients apart. */
export const tells = (swept: SweptGram, i: number, j: number): boolean =>
  holds(swept, [
    [i, 1],
    [j, -1],
  ]);

/** Combinations of coefficients that change no fitted value, one per dependent column. */
export function nullVectors({ inBasis, swept }: SweptGram): number[][] {
  const k = inBasis.length;
  const tidy = (value: number) => (Math.abs(value) > sameEntry ? value : 0);
  return Array.from({ length: k }, (_, free) => free)
    .filter((free) => inBasis[free] === 0)
    .map((free) =>
      Array.from({ length: k }, (_, row) =>
        row === free ? 1 : inBasis[row] === 1 ? tidy(-swept[row * k + free]!) : 0,
      ),
    );
}

/** Leverage of one contact in the unweighted design (between 0 and 1; 1: nothing else holds its direction). */
function leverage(
  { inBasis, swept }: SweptGram,
  columns: Int32Array,
  contact: number,
  extra: number,
): number {
  const k = inBasis.length;
  let sum = 0;
  for (let i = 0; i < 5; i++) {
    const row = i === 4 ? extra : columns[4 * contact + i]!;
    if (row < 0 || inBasis[row] === 0) continue;
    for (let j = 0; j < 5; j++) {
      const column = j === 4 ? extra : columns[4 * contact + j]!;
      if (column < 0 || inBasis[column] === 0) continue;
      sum += (signs[i] ?? 1) * (signs[j] ?? 1) * swept[row * k + column]!;
    }
  }
  return sum;
}

/**
 * What is left of the design when one cluster is taken away, for each cluster that this could matter for:
 * an answer that hangs on one cluster alone has no honest standard error.
 *
 * Only contacts that no other cluster has are lost with a cluster, and the design loses rank only when
 * their leverages add up to one or more; leverages add up to the rank, so there are few such clusters.
 *
 * @param lonely contacts by the one cluster that has them
 * @param extraOf the additional column of a contact, -1 for none
 */
export function withoutEachCluster(
  gram: Float64Array,
  whole: SweptGram,
  columns: Int32Array,
  lonely: ReadonlyMap<number, number[]>,
  extraOf: (contact: number) => number = () => -1,
): SweptGram[] {
  const k = whole.inBasis.length;
  const left: SweptGram[] = [];
  for (const contacts of lonely.values()) {
    const total = contacts.reduce((sum, t) => sum + leverage(whole, columns, t, extraOf(t)), 0);
    if (total < 1 - 1e-6) continue;
    const rest = gram.slice();
    for (const t of contacts) addContact(rest, k, columns, t, -1, extraOf(t));
    const swept = sweepGram(rest, k);
    if (swept.rank < whole.rank) left.push(swept);
  }
  return left;
}

/** Groups of indices from `from` to `to` (excluded) that are told apart pairwise, in ascending order. */
export function toldGroups(from: number, to: number, told: (i: number, j: number) => boolean): number[][] {
  const groups: number[][] = [];
  for (let i = from; i < to; i++) {
    const own = groups.find((group) => told(group[0]!, i));
    if (own) own.push(i);
    else groups.push([i]);
  }
  return groups;
}

/** Antennas and receivers that met: one row of the design. No receivers: one receiver on both sides. */
export interface LadderContact {
  antennaA: number;
  antennaB: number;
  receiverA: number | null;
  receiverB: number | null;
}

/**
 * Which antennas, and which receivers, a set of contacts puts on one scale: the question "would this cure
 * help?" without any data. O(contacts + columns^3).
 *
 * @returns groups of ids; antennas (receivers) of one group can be compared
 * @example
 * ladderGroups([{ antennaA: 1, antennaB: 2, receiverA: 7, receiverB: 8 }]).antennas // [[1], [2]]
 */
export function ladderGroups(contacts: readonly LadderContact[]): {
  antennas: number[][];
  receivers: number[][];
} {
  const ascending = (ids: Iterable<number>) => [...new Set(ids)].sort((a, b) => a - b);
  const antennas = ascending(contacts.flatMap((c) => [c.antennaA, c.antennaB]));
  const receivers = ascending(
    contacts.flatMap((c) => [c.receiverA, c.receiverB]).filter((id): id is number => id !== null),
  );
  const p = antennas.length;
  const k = p + receivers.length;
  const columns = new Int32Array(4 * contacts.length).fill(-1);
  contacts.forEach((c, t) => {
    if (c.antennaA !== c.antennaB)
      columns.set([antennas.indexOf(c.antennaA), antennas.indexOf(c.antennaB)], 4 * t);
    if (c.receiverA !== null && c.receiverB !== null && c.receiverA !== c.receiverB)
      columns.set([p + receivers.indexOf(c.receiverA), p + receivers.indexOf(c.receiverB)], 4 * t + 2);
  });
  const gram = new Float64Array(k * k);
  contacts.forEach((_, t) => addContact(gram, k, columns, t));
  const swept = sweepGram(gram, k);
  const told = (i: number, j: number) => tells(swept, i, j);
  return {
    antennas: toldGroups(0, p, told).map((group) => group.map((j) => antennas[j]!)),
    receivers: toldGroups(p, k, told).map((group) => group.map((j) => receivers[j - p]!)),
  };
}
