import { describe, expect, it } from 'vitest';
import { continuedFraction } from './continued-fraction.ts';

describe('continuedFraction', () => {
  it('reaches the golden ratio 1 + 1/(1 + 1/(1 + ...)) and tan 1 (Lambert 1761)', () => {
    expect(continuedFraction(1, () => [1, 1])).toBeCloseTo((1 + Math.sqrt(5)) / 2, 14);
    // cot 1 = 1/1 - ..., that is 1 + -1/(3 + -1/(5 + ...)).
    expect(continuedFraction(1, (i) => [-1, 2 * i + 1])).toBeCloseTo(1 / Math.tan(1), 14);
  });

  it('says so when a fraction does not settle', () => {
    expect(() => continuedFraction(1, (i) => [i % 2 === 0 ? 5 : -5, 0.001])).toThrow(RangeError);
  });
});
