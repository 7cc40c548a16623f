import { describe, expect, it } from 'vitest';
import { largestSize, readPairs, requireNumbers, roundTo } from './arguments.ts';

describe('reading of arguments', () => {
  it('takes differences, or two lists as first minus second', () => {
    expect([...readPairs([[1, 2]], 1).differences]).toEqual([1, 2]);
    const { differences, options } = readPairs([[5, 7], Float64Array.of(1, 2), { level: 0.9 }], 1);
    expect([...differences]).toEqual([4, 5]);
    expect(options).toEqual({ level: 0.9 });
  });

  it('leaves the caller’s list alone', () => {
    const given = Float64Array.of(3, 1, 2);
    readPairs([given], 1).differences.sort();
    expect([...given]).toEqual([3, 1, 2]);
  });

  it('names the list that is too short, uneven or not finite, and the entry', () => {
    expect(() => readPairs([[]], 1)).toThrow('differences must hold at least 1 value, got 0');
    expect(() => readPairs([[1], [1, 2]], 1)).toThrow('a and b must have equal lengths, got 1 and 2');
    expect(() =>
      readPairs(
        [
          [1, Number.NaN],
          [1, 2],
        ],
        1,
      ),
    ).toThrow('a must hold finite numbers, entry 1 is NaN');
    expect(() => requireNumbers('y', Float64Array.of(1, 2, Infinity))).toThrow('entry 2 is Infinity');
  });

  it('rounds to a resolution, so that 0.1 + 0.2 - 0.3 is zero', () => {
    expect([...roundTo(Float64Array.of(0.1 + 0.2 - 0.3, 1.26), 0.01)].map(Math.abs)).toEqual([0, 1.26]);
    expect(() => roundTo(Float64Array.of(1), -1)).toThrow(/^resolution /);
  });

  it('finds the largest size, zero for none', () => {
    expect([largestSize(Float64Array.of(1, -4, 2)), largestSize(new Float64Array(0))]).toEqual([4, 0]);
  });
});
