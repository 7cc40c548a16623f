import { describe, expect, it } from 'vitest';
import { solveBracketed, solveIncreasing } from './solve.ts';

describe('solveIncreasing', () => {
  it('finds a root by Newton steps', () => {
    expect(solveIncreasing((u) => [u * u * u - 2, 3 * u * u], 0.1, 10, 1)).toBeCloseTo(Math.cbrt(2), 14);
  });

  it('halves the bracket where the slope would throw Newton out of it', () => {
    const root = solveIncreasing((u) => [Math.atan(u - 3), 1 / (1 + (u - 3) ** 2)], -1000, 1000, 900);
    expect(root).toBeCloseTo(3, 13);
  });
});

describe('solveBracketed', () => {
  it('finds a root from values alone, also of a function that is flat and then steep', () => {
    expect(solveBracketed((u) => u * u * u - 2, 0, 10)).toBeCloseTo(Math.cbrt(2), 14);
    expect(solveBracketed((u) => Math.exp(40 * (u - 1)) - 1e-3, 0, 2)).toBeCloseTo(
      1 + Math.log(1e-3) / 40,
      13,
    );
  });

  it('gives the end of the bracket when the root lies at it or beyond', () => {
    expect(solveBracketed((u) => u + 1, 0, 5)).toBe(0);
    expect(solveBracketed((u) => u - 7, 0, 5)).toBe(5);
  });
});
