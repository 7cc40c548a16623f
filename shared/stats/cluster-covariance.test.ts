import { describe, expect, it } from 'vitest';
import { clusterSandwich, inverseDiagonal, support } from './cluster-covariance.ts';
import { readClusters } from './cluster-ids.ts';
import { readDesign } from './design.ts';
import { leastSquares } from './least-squares.ts';

// Two cells and one column, small enough to invert by hand: X'X = [[2, 0, 1], [0, 2, 1], [1, 1, 2]],
// its inverse (1/4) [[3, 1, -2], [1, 3, -2], [-2, -2, 4]].
const design = readDesign({ cells: [0, 0, 1, 1], cellCount: 2, columns: [[1, 0, 1, 0]] }, 4);
const inverse = [
  [0.75, 0.25, -0.5],
  [0.25, 0.75, -0.5],
  [-0.5, -0.5, 1],
];
const rows = [
  [1, 0, 1],
  [1, 0, 0],
  [0, 1, 1],
  [0, 1, 0],
];
const fit = leastSquares(design, Float64Array.of(4, 1, 2, 3), null);
const clusters = readClusters('clusters', [0, 1, 0, 2], 4);

describe('clusterSandwich', () => {
  it('equals bread times meat times bread written out', () => {
    // Residuals of cell means 2, 2 and slope 1: 1, -1, -1, 1.
    expect([...fit.residuals].map((value) => Math.round(value * 1e9) / 1e9)).toEqual([1, -1, -1, 1]);
    const scores = [0, 1, 2].map((g) =>
      [0, 1, 2].map((j) =>
        rows.reduce((sum, row, i) => sum + (clusters.ids[i] === g ? row[j]! * fit.residuals[i]! : 0), 0),
      ),
    );
    const influence = scores.map((score) =>
      inverse.map((line) => line.reduce((sum, value, j) => sum + value * score[j]!, 0)),
    );
    const covariance = clusterSandwich(design, fit, null, clusters);
    for (let a = 0; a < 3; a++) {
      for (let b = 0; b < 3; b++) {
        const expected = influence.reduce((sum, line) => sum + line[a]! * line[b]!, 0);
        expect(covariance[a * 3 + b]).toBeCloseTo(expected, 12);
      }
    }
  });

  it('goes with the diagonal of the inverse and the counts behind each coefficient', () => {
    inverseDiagonal(design, fit).forEach((value, j) => expect(value).toBeCloseTo(inverse[j]![j]!, 12));
    const { rows: held, clusters: heldClusters } = support(design, clusters);
    expect([[...held], [...heldClusters]]).toEqual([
      [2, 2, 2],
      [2, 2, 1],
    ]);
  });
});
