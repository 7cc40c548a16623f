import { type Numbers, requireNumbers, requirePositive } from './arguments.ts';
import { readClusters } from './cluster-ids.ts';

/** One unit a row; all lists of one length. Ids are whole numbers from 0. */
export interface LadderRows {
  antennaA: Numbers;
  antennaB: Numbers;
  /** Receiver on A's and on B's side; the same one on both (an alternating unit) has no offset. */
  receiverA: Numbers;
  receiverB: Numbers;
  /** dB, above zero when A hears better. */
  difference: Numbers;
  /** Dense cluster id of each row (see clusterIds): call sign and night. */
  clusters: Numbers;
}

/**
 * Rows gathered by contact: antennas and receivers on both sides. All rows of one contact have the same
 * design row, so the fit needs only the contacts' weights and means, and the clusters' scores only the
 * sums by cluster and contact.
 */
export interface LadderData {
  /** Ascending; column j of the design belongs to antennaIds[j], the receivers' columns follow. */
  antennaIds: Int32Array;
  /** Receivers with at least one row against another receiver, ascending. */
  receiverIds: Int32Array;
  n: number;
  clusters: number;
  contacts: number;
  /** Columns of each contact, four each with the signs + - + -: antenna A, antenna B, receiver A, receiver B; -1: none. */
  columns: Int32Array;
  /** Positions in antennaIds, two each; equal where two receivers were on one antenna. */
  antennas: Int32Array;
  rows: Int32Array;
  weight: Float64Array;
  /** Weighted mean of each contact's differences, dB. */
  mean: Float64Array;
  /** Sum of w (d - mean of its contact)^2 over all rows. */
  squaresWithin: number;
  /** Largest size of a difference, dB. */
  reach: number;
  /** Cluster g holds entries starts[g] to starts[g + 1] - 1. */
  starts: Int32Array;
  entryContact: Int32Array;
  entryWeight: Float64Array;
  /** Sum of w d over the rows of the cluster and contact. */
  entrySum: Float64Array;
  /** The only cluster of a contact, -1 where it has more. */
  soleCluster: Int32Array;
}

interface IndexedIds {
  ids: Int32Array;
  /** Position in `ids` of each row's entry. */
  first: Int32Array;
  second: Int32Array;
}

/** The ascending list of all ids that occur in either column, and each entry's place in it. O(n). */
function indexIds(names: [string, string], first: Numbers, second: Numbers): IndexedIds {
  const n = first.length;
  let largest = 0;
  for (const [name, column] of [
    [names[0], first],
    [names[1], second],
  ] as const) {
    for (let i = 0; i < n; i++) {
      const id = column[i]!;
      if (!(Number.isInteger(id) && id >= 0 && id <= 2147483647)) {
        throw new RangeError(`${name} must hold whole numbers from 0, entry ${i} is ${id}`);
      }
      if (id > largest) largest = id;
    }
  }
  if (largest > 4 * n + 100_000) {
    const ids = Int32Array.from(new Set([...Array.from(first), ...Array.from(second)])).sort();
    const places = new Map(Array.from(ids, (id, j) => [id, j]));
    const placed = (column: Numbers) => Int32Array.from(column, (id) => places.get(id)!);
    return { ids, first: placed(first), second: placed(second) };
  }
  const place = new Int32Array(largest + 1);
  for (let i = 0; i < n; i++) {
    place[first[i]!] = 1;
    place[second[i]!] = 1;
  }
  const ids: number[] = [];
  for (let id = 0; id <= largest; id++) if (place[id] === 1) place[id] = ids.push(id) - 1;
  const placed = (column: Numbers) => {
    const places = new Int32Array(n);
    for (let i = 0; i < n; i++) places[i] = place[column[i]!]!;
    return places;
  };
  return { ids: Int32Array.from(ids), first: placed(first), second: placed(second) };
}

/** Numbers for keys below `size` in the order of their coming; a plain table where that is small. */
function numberKeys(size: number): { numberOf: (key: number) => number; keys: number[] } {
  const keys: number[] = [];
  if (size <= 1_000_000) {
    const table = new Int32Array(size);
    return { keys, numberOf: (key) => (table[key]! > 0 ? table[key]! : (table[key] = keys.push(key))) - 1 };
  }
  const known = new Map<number, number>();
  return {
    keys,
    numberOf(key) {
      let number = known.get(key);
      if (number === undefined) known.set(key, (number = keys.push(key) - 1));
      return number;
    },
  };
}

/**
 * Checks the rows and gathers them. O(n) time and memory.
 *
 * @throws RangeError naming the argument: no rows, unequal lengths, ids that are no whole numbers, a
 *   difference or weight that is not finite, a weight that is not positive, one antenna and one receiver
 *   on both sides of a row
 */
export function readLadderRows(rows: LadderRows, weights: Numbers | null): LadderData {
  const { difference } = rows;
  requireNumbers('difference', difference);
  const n = difference.length;
  for (const name of ['antennaA', 'antennaB', 'receiverA', 'receiverB'] as const) {
    if (rows[name].length !== n)
      throw new RangeError(`${name} must hold one id per row (${n}), got ${rows[name].length}`);
  }
  if (weights && weights.length !== n)
    throw new RangeError(`weights must hold one value per row (${n}), got ${weights.length}`);
  const grouped = readClusters('clusters', rows.clusters, n);
  const antennaIds = indexIds(['antennaA', 'antennaB'], rows.antennaA, rows.antennaB);
  const everyReceiver = indexIds(['receiverA', 'receiverB'], rows.receiverA, rows.receiverB);
  const contacts = gatherContacts(rows, antennaIds, everyReceiver);
  const { contactOf, sign, count } = contacts;

  const held = new Int32Array(count);
  const weight = new Float64Array(count);
  const sum = new Float64Array(count);
  let reach = 0;
  for (let i = 0; i < n; i++) {
    const t = contactOf[i]!;
    const w = weights ? weights[i]! : 1;
    if (weights) requirePositive(`weights[${i}]`, w);
    held[t]! += 1;
    weight[t]! += w;
    sum[t]! += w * sign[i]! * difference[i]!;
    reach = Math.max(reach, Math.abs(difference[i]!));
  }
  const mean = sum.map((value, t) => value / weight[t]!);
  let squaresWithin = 0;
  for (let i = 0; i < n; i++) {
    const rest = sign[i]! * difference[i]! - mean[contactOf[i]!]!;
    squaresWithin += (weights ? weights[i]! : 1) * rest * rest;
  }
  return {
    antennaIds: antennaIds.ids,
    receiverIds: contacts.receiverIds,
    ...{
      n,
      clusters: grouped.count,
      contacts: count,
      columns: contacts.columns,
      antennas: contacts.antennas,
    },
    ...{ rows: held, weight, mean, squaresWithin, reach },
    ...gatherEntries(grouped, contactOf, sign, difference, weights, count),
  };
}

/** Gives every row its contact, turned so that the antenna (else the receiver) with the lower id is A. */
function gatherContacts(rows: LadderRows, antennas: IndexedIds, receivers: IndexedIds) {
  const n = rows.difference.length;
  const p = antennas.ids.length;
  const q = receivers.ids.length;
  const contactOf = new Int32Array(n);
  const sign = new Int8Array(n);
  const { numberOf, keys } = numberKeys(p * p * q * q);
  for (let i = 0; i < n; i++) {
    const a = antennas.first[i]!;
    const b = antennas.second[i]!;
    const ra = receivers.first[i]!;
    const rb = receivers.second[i]!;
    if (a === b && ra === rb) {
      throw new RangeError(
        `antennaA and antennaB must differ where the receivers are the same, both are ${rows.antennaA[i]} in row ${i}`,
      );
    }
    const turned = a > b || (a === b && ra > rb);
    sign[i] = turned ? -1 : 1;
    const pair = turned ? b * p + a : a * p + b;
    // Whichever receiver alternates, it drops out of the difference.
    const met = ra === rb ? 0 : turned ? rb * q + ra : ra * q + rb;
    contactOf[i] = numberOf(pair * q * q + met);
  }
  // In ascending order of their keys, so that the order of the rows leaves no trace.
  const order = Array.from(keys, (_, t) => t).sort((s, t) => keys[s]! - keys[t]!);
  const place = new Int32Array(keys.length);
  order.forEach((t, at) => (place[t] = at));
  for (let i = 0; i < n; i++) contactOf[i] = place[contactOf[i]!]!;

  const parts = order.map((t) => {
    const key = keys[t]!;
    const rb = key % q;
    const ra = Math.floor(key / q) % q;
    const pair = Math.floor(key / (q * q));
    return { a: Math.floor(pair / p), b: pair % p, ra, rb };
  });
  const used = new Set(parts.flatMap(({ ra, rb }) => (ra === rb ? [] : [ra, rb])));
  const usedInOrder = [...used].sort((x, y) => x - y);
  const columnOf = new Map(usedInOrder.map((r, at) => [r, p + at]));
  const columns = new Int32Array(4 * parts.length).fill(-1);
  parts.forEach(({ a, b, ra, rb }, t) => {
    if (a !== b) columns.set([a, b], 4 * t);
    if (ra !== rb) columns.set([columnOf.get(ra)!, columnOf.get(rb)!], 4 * t + 2);
  });
  return {
    ...{ contactOf, sign, columns, count: parts.length },
    antennas: Int32Array.from(parts.flatMap(({ a, b }) => [a, b])),
    receiverIds: Int32Array.from(usedInOrder, (r) => receivers.ids[r]!),
  };
}

/** Sums by cluster and contact, in the order of the clusters. */
function gatherEntries(
  { order, starts, size, count: clusters }: ReturnType<typeof readClusters>,
  contactOf: Int32Array,
  sign: Int8Array,
  difference: Numbers,
  weights: Numbers | null,
  contacts: number,
) {
  const n = order.length;
  const entryContact = new Int32Array(n);
  const entryWeight = new Float64Array(n);
  const entrySum = new Float64Array(n);
  const entryStarts = new Int32Array(clusters + 1);
  const soleCluster = new Int32Array(contacts).fill(-2);
  const entryOf = new Int32Array(contacts).fill(-1);
  let entries = 0;
  let cluster = 0;
  for (let g = 0; g < size; g++) {
    if (starts[g] === starts[g + 1]) continue;
    const from = entries;
    for (let at = starts[g]!; at < starts[g + 1]!; at++) {
      const i = order[at]!;
      const t = contactOf[i]!;
      const w = weights ? weights[i]! : 1;
      let entry = entryOf[t]!;
      // Entries of earlier clusters lie below `from`: no need to clear between clusters.
      if (entry < from) {
        entryOf[t] = entry = entries++;
        entryContact[entry] = t;
        soleCluster[t] = soleCluster[t] === -2 ? cluster : -1;
      }
      entryWeight[entry]! += w;
      entrySum[entry]! += w * sign[i]! * difference[i]!;
    }
    cluster += 1;
    entryStarts[cluster] = entries;
  }
  return {
    starts: entryStarts,
    entryContact: entryContact.slice(0, entries),
    entryWeight: entryWeight.slice(0, entries),
    entrySum: entrySum.slice(0, entries),
    soleCluster,
  };
}
