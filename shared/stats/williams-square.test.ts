import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { williamsSquare } from './williams-square.ts';

describe('williamsSquare', () => {
  // Williams (1949); Cox (1992) paper-pulp example as printed in the SAS/STAT documentation of PLAN: the cyclic
  // square of the initial block 1 2 6 3 5 4.
  it('is the printed square of six treatments', () => {
    expect(williamsSquare(6).map((order) => order.map((treatment) => treatment + 1))).toEqual([
      [1, 2, 6, 3, 5, 4],
      [2, 3, 1, 4, 6, 5],
      [3, 4, 2, 5, 1, 6],
      [4, 5, 3, 6, 2, 1],
      [5, 6, 4, 1, 3, 2],
      [6, 1, 5, 2, 4, 3],
    ]);
  });

  it('has every treatment in every place and every pair of neighbours equally often', () => {
    fc.assert(
      fc.property(fc.integer({ min: 2, max: 16 }), (n) => {
        const orders = williamsSquare(n);
        const times = n % 2 === 0 ? 1 : 2;
        const pairs = new Map<string, number>();
        const places = new Map<string, number>();
        const count = (map: Map<string, number>, key: string) => map.set(key, (map.get(key) ?? 0) + 1);
        for (const order of orders) {
          order.forEach((treatment, place) => {
            count(places, `${treatment} at ${place}`);
            if (place > 0) count(pairs, `${order[place - 1]!} then ${treatment}`);
          });
        }
        expect(pairs.size).toBe(n * (n - 1));
        expect(places.size).toBe(n * n);
        expect(new Set([...pairs.values(), ...places.values()])).toEqual(new Set([times]));
      }),
    );
  });

  it('names the argument it refuses', () => {
    expect(() => williamsSquare(1)).toThrow(/^n /);
    expect(() => williamsSquare(2.5)).toThrow(/^n /);
  });
});
