import type { Numbers } from './arguments.ts';

export interface ClusterIds {
  /** Dense id of each row, 0 ... count - 1 in order of first appearance. */
  ids: Int32Array;
  count: number;
}

/**
 * Dense cluster ids from any keys, e.g. call sign and night written as one text.
 *
 * @param keys one per row
 * @example clusterIds(['EA8QSH 2026-01-14', 'K1QRB 2026-01-14', 'EA8QSH 2026-01-14']).ids // [0, 1, 0]
 */
export function clusterIds(keys: readonly (string | number)[]): ClusterIds {
  const known = new Map<string | number, number>();
  const ids = Int32Array.from(keys, (key) => {
    const id = known.get(key) ?? known.size;
    known.set(key, id);
    return id;
  });
  return { ids, count: known.size };
}

/**
 * Dense ids of the pairs (first, second): the intersection of two clusterings.
 *
 * @throws RangeError when the lengths differ
 */
export function pairClusters(first: Numbers, second: Numbers): ClusterIds {
  if (first.length !== second.length) {
    throw new RangeError(
      `first and second must have equal lengths, got ${first.length} and ${second.length}`,
    );
  }
  let width = 1;
  for (let i = 0; i < second.length; i++) width = Math.max(width, second[i]! + 1);
  return clusterIds(Array.from(first, (id, i) => id * width + second[i]!));
}

export interface CheckedClusters {
  ids: Int32Array;
  /** Largest id + 1. */
  size: number;
  /** Ids that occur. */
  count: number;
  /** Rows in the order of their clusters. */
  order: Int32Array;
  /** Cluster g holds positions starts[g] to starts[g + 1] - 1 of `order`. */
  starts: Int32Array;
}

/** Groups rows by their ids (counting sort, O(n)). */
export function groupClusters(ids: Int32Array, size: number): CheckedClusters {
  const starts = new Int32Array(size + 1);
  for (let i = 0; i < ids.length; i++) starts[ids[i]! + 1]! += 1;
  let count = 0;
  for (let g = 0; g < size; g++) {
    if (starts[g + 1]! > 0) count += 1;
    starts[g + 1]! += starts[g]!;
  }
  const next = starts.slice(0, size);
  const order = new Int32Array(ids.length);
  for (let i = 0; i < ids.length; i++) {
    const id = ids[i]!;
    order[next[id]!] = i;
    next[id]! += 1;
  }
  return { ids, size, count, order, starts };
}

/** @throws RangeError naming the argument: one id per row, whole numbers from 0 to 2^31 - 2 */
export function readClusters(name: string, clusters: Numbers, rows: number): CheckedClusters {
  if (clusters.length !== rows) {
    throw new RangeError(`${name} must hold one id per row (${rows}), got ${clusters.length}`);
  }
  let size = 0;
  for (let i = 0; i < rows; i++) {
    const id = clusters[i]!;
    if (!(Number.isInteger(id) && id >= 0 && id < 2147483647)) {
      throw new RangeError(`${name} must hold whole numbers from 0, entry ${i} is ${id}`);
    }
    if (id >= size) size = id + 1;
  }
  // Sparse ids would ask for memory by their largest value: make them dense first.
  if (size > 4 * rows + 1000) {
    const dense = clusterIds(Array.from(clusters));
    return groupClusters(dense.ids, dense.count);
  }
  return groupClusters(clusters instanceof Int32Array ? clusters : Int32Array.from(clusters), size);
}
