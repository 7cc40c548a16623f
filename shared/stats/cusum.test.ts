import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { cusum } from './cusum.ts';

const values = fc.array(fc.integer({ min: -60, max: 60 }), { minLength: 1, maxLength: 80 });
const settings = fc.record({ k: fc.integer({ min: 0, max: 10 }), h: fc.integer({ min: 1, max: 100 }) });

describe('cusum', () => {
  it('moves with the target and swaps its sides with the sign', () => {
    fc.assert(
      fc.property(values, settings, fc.integer({ min: -500, max: 500 }), (x, { k, h }, shift) => {
        const plain = cusum(x, { target: 0, k, h });
        const moved = cusum(
          x.map((value) => value + shift),
          { target: shift, k, h },
        );
        expect(moved).toEqual(plain);
        const turned = cusum(
          x.map((value) => -value),
          { target: 0, k, h },
        );
        expect([turned.high, turned.low]).toEqual([plain.low, plain.high]);
        expect(turned.firstAlarmIndex).toBe(plain.firstAlarmIndex);
      }),
    );
  });

  it('has the largest sum of any run of values that ends there', () => {
    fc.assert(
      fc.property(values, settings, (x, { k, h }) => {
        const { high } = cusum(x, { target: 0, k, h });
        x.forEach((_, end) => {
          const sums = Array.from({ length: end + 1 }, (__, start) =>
            x.slice(start, end + 1).reduce((sum, value) => sum + value - k, 0),
          );
          expect(high[end]).toBe(Math.max(0, ...sums));
        });
      }),
    );
  });

  it('alarms later, if at all, with a higher limit, and never before the change it names', () => {
    fc.assert(
      fc.property(values, settings, fc.boolean(), (x, { k, h }, restart) => {
        const { alarms, firstAlarmIndex, high, low } = cusum(x, { target: 0, k, h, restart });
        const later = cusum(x, { target: 0, k, h: h + 7 }).firstAlarmIndex ?? Infinity;
        expect(later).toBeGreaterThanOrEqual(firstAlarmIndex ?? Infinity);
        for (const { index, side, since } of alarms) {
          const sums = side === 'high' ? high : low;
          expect(since).toBeLessThanOrEqual(index);
          expect(sums[index]).toBeGreaterThan(h);
          const run = x
            .slice(since, index + 1)
            .reduce((sum, value) => sum + (side === 'high' ? value : -value) - k, 0);
          expect(run).toBe(sums[index]);
        }
      }),
    );
  });

  it('finds a shift that was there from the start sooner with a head start of half the limit', () => {
    const x = new Array<number>(12).fill(1);
    const plain = cusum(x, { target: 0, k: 0.5, h: 4 });
    const fast = cusum(x, { target: 0, k: 0.5, h: 4, fastInitialResponse: true });
    expect([plain.firstAlarmIndex, fast.firstAlarmIndex]).toEqual([8, 4]);
    expect([fast.high[0], fast.low[0]]).toEqual([2.5, 0.5]);
  });

  it('starts anew after an alarm when asked to', () => {
    const x = [3, 3, 3, 3, 3, 3];
    const options = { target: 0, k: 1, h: 3.5 };
    expect(cusum(x, options).alarms).toEqual([{ index: 1, side: 'high', since: 0 }]);
    expect(cusum(x, { ...options, restart: true }).alarms).toEqual([
      { index: 1, side: 'high', since: 0 },
      { index: 3, side: 'high', since: 2 },
      { index: 5, side: 'high', since: 4 },
    ]);
  });

  it('names the argument it refuses', () => {
    expect(() => cusum([], { target: 0, k: 1, h: 1 })).toThrow(/^values /);
    expect(() => cusum([Number.NaN], { target: 0, k: 1, h: 1 })).toThrow(/^values /);
    expect(() => cusum([1], { target: Infinity, k: 1, h: 1 })).toThrow(/^target /);
    expect(() => cusum([1], { target: 0, k: -1, h: 1 })).toThrow(/^k /);
    expect(() => cusum([1], { target: 0, k: 1, h: 0 })).toThrow(/^h /);
  });
});
