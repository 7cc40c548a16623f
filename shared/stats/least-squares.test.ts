import { describe, expect, it } from 'vitest';
import { readDesign } from './design.ts';
import { leastSquares, weightedDot } from './least-squares.ts';
import { createRandom } from './random.ts';

describe('leastSquares', () => {
  it('leaves residuals at right angles to every cell and column, weights included', () => {
    const random = createRandom(5);
    const n = 700;
    const cells = Int32Array.from({ length: n }, () => random.integer(6));
    const columns = [0, 1, 2].map((j) => Float64Array.from({ length: n }, () => random.normal() + 100 * j));
    const y = Float64Array.from({ length: n }, (_, i) => 1e4 + cells[i]! + columns[0]![i]! + random.normal());
    const weights = Float64Array.from({ length: n }, () => 0.5 + random.uniform());
    const { residuals, solution, rank } = leastSquares(
      readDesign({ cells, cellCount: 6, columns }, n),
      y,
      weights,
    );
    expect(rank).toBe(9);
    for (const column of columns)
      expect(Math.abs(weightedDot(column, residuals, weights))).toBeLessThan(1e-7);
    for (let c = 0; c < 6; c++) {
      const indicator = Float64Array.from(cells, (cell) => (cell === c ? 1 : 0));
      expect(Math.abs(weightedDot(indicator, residuals, weights))).toBeLessThan(1e-8);
    }
    for (let i = 0; i < n; i++) {
      const fitted =
        solution[cells[i]!]! + columns.reduce((sum, column, j) => sum + solution[6 + j]! * column[i]!, 0);
      expect(fitted + residuals[i]!).toBeCloseTo(y[i]!, 8);
    }
  });

  it('gives null vectors that change no fitted value, largest entry 1', () => {
    const cells = [0, 0, 1, 1, 3];
    const columns = [
      [2, 2, 0, 0, 0],
      [1, 0, 1, 0, 1],
      [1, 0, 1, 0, 1],
      [0, 0, 0, 0, 0],
    ];
    const design = readDesign({ cells, cellCount: 4, columns }, 5);
    const { nullSpace, rank } = leastSquares(design, Float64Array.of(1, 2, 3, 4, 5), null);
    expect(rank).toBe(4);
    expect(nullSpace).toHaveLength(4);
    for (const vector of nullSpace) {
      expect(Math.max(...vector.map(Math.abs))).toBeCloseTo(1, 12);
      cells.forEach((cell, i) => {
        const change =
          vector[cell]! + columns.reduce((sum, column, j) => sum + column[i]! * vector[4 + j]!, 0);
        expect(change).toBeCloseTo(0, 10);
      });
    }
  });
});
