import { describe, expect, it } from 'vitest';
import { clusterIds, groupClusters, pairClusters, readClusters } from './cluster-ids.ts';

describe('cluster ids', () => {
  it('are dense, in order of first appearance', () => {
    expect(clusterIds(['b', 'a', 'b', 'c'])).toEqual({ ids: Int32Array.of(0, 1, 0, 2), count: 3 });
    expect(clusterIds([])).toEqual({ ids: new Int32Array(0), count: 0 });
  });

  it('of pairs tell every pair apart', () => {
    expect(pairClusters([0, 0, 1, 1, 0], [5, 6, 5, 6, 5])).toEqual({
      ids: Int32Array.of(0, 1, 2, 3, 0),
      count: 4,
    });
    expect(() => pairClusters([0], [])).toThrow(/^first and second /);
  });

  it('group rows, keeping their order within a cluster and passing over ids that do not occur', () => {
    const { order, starts, count } = groupClusters(Int32Array.of(2, 0, 2, 0), 3);
    expect([...order]).toEqual([1, 3, 0, 2]);
    expect([...starts]).toEqual([0, 2, 2, 4]);
    expect(count).toBe(2);
  });

  it('are made dense when their values are far larger than their number', () => {
    const { ids, size, count } = readClusters('clusters', [2_000_000_000, 7, 2_000_000_000], 3);
    expect([...ids]).toEqual([0, 1, 0]);
    expect([size, count]).toEqual([2, 2]);
  });

  it('are refused by name when not whole, negative or not one per row', () => {
    expect(() => readClusters('clusters', [0, 1], 3)).toThrow('clusters must hold one id per row (3), got 2');
    expect(() => readClusters('secondClusters', [0, -1], 2)).toThrow(/^secondClusters .* entry 1 is -1/);
    expect(() => readClusters('clusters', [0.5], 1)).toThrow(/entry 0 is 0.5/);
  });
});
