import { describe, expect, it } from 'vitest';
import { solveIncreasing } from './solve.ts';

describe('solveIncreasing', () => {
  it('finds a root by Newton steps', () => {
    expect(solveIncreasing((u) => [u * u * u - 2, 3 * u * u], 0.1, 10, 1)).toBeCloseTo(Math.cbrt(2), 14);
  });

  it('halves the bracket where the slope would throw Newton out of it', () => {
    const root = solveIncreasing((u) => [Math.atan(u - 3), 1 / (1 + (u - 3) ** 2)], -1000, 1000, 900);
    expect(root).toBeCloseTo(3, 13);
  });
});
