import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { inverseGram, pivotedQr, solveLower, solveUpper } from './pivoted-qr.ts';

const matrix = (columns: number[][]) => columns.map((column) => Float64Array.from(column));
const dot = (a: ArrayLike<number>, b: ArrayLike<number>) =>
  Array.from(a).reduce((sum, x, i) => sum + x * b[i]!, 0);

describe('pivotedQr', () => {
  it('has a triangle whose columns have the same inner products as the matrix', () => {
    const column = fc.array(fc.integer({ min: -5, max: 5 }), { minLength: 6, maxLength: 6 });
    fc.assert(
      fc.property(fc.array(column, { minLength: 1, maxLength: 4 }), (columns) => {
        const m = columns.length;
        const { r, order } = pivotedQr(matrix(columns), 1e-9);
        for (let a = 0; a < m; a++) {
          for (let b = 0; b < m; b++) {
            const rebuilt = Array.from({ length: m }, (_, i) => r[i * m + a]! * r[i * m + b]!).reduce(
              (x, y) => x + y,
            );
            expect(rebuilt).toBeCloseTo(dot(columns[order[a]!]!, columns[order[b]!]!), 8);
          }
        }
      }),
    );
  });

  it('finds the rank and puts independent columns first', () => {
    const a = [1, 0, 2, 1];
    const b = [0, 1, 1, -1];
    const both = a.map((value, i) => value - 2 * b[i]!);
    const { rank, order } = pivotedQr(matrix([a, [0, 0, 0, 0], b, both]), 1e-9);
    expect(rank).toBe(2);
    expect(order.slice(0, 2)).not.toContain(1);
    expect([...order].sort()).toEqual([0, 1, 2, 3]);
  });

  it('solves least squares, and both triangles', () => {
    // Line through (0, 1), (1, 3), (2, 5), (3, 7): 1 + 2 x.
    const qr = pivotedQr(
      matrix([
        [1, 1, 1, 1],
        [0, 1, 2, 3],
      ]),
      1e-9,
    );
    const right = Float64Array.of(1, 3, 5, 7);
    qr.applyTransposed(right);
    const found = solveUpper(qr, right);
    expect(found[qr.order.indexOf(0)]).toBeCloseTo(1, 12);
    expect(found[qr.order.indexOf(1)]).toBeCloseTo(2, 12);
    const x = solveLower(qr, [2, 3]);
    expect(qr.r[0]! * x[0]!).toBeCloseTo(2, 12);
    expect(qr.r[1]! * x[0]! + qr.r[3]! * x[1]!).toBeCloseTo(3, 12);
  });

  it('inverts the matrix of inner products', () => {
    const columns = [
      [1, 1, 1, 1],
      [0, 1, 2, 3],
    ];
    const qr = pivotedQr(matrix(columns), 1e-9);
    // [[4, 6], [6, 14]] inverted is [[0.7, -0.3], [-0.3, 0.2]].
    const inverse = inverseGram(qr);
    const at = (i: number, j: number) => inverse[qr.order.indexOf(i) * 2 + qr.order.indexOf(j)];
    expect(at(0, 0)).toBeCloseTo(0.7, 12);
    expect(at(0, 1)).toBeCloseTo(-0.3, 12);
    expect(at(1, 1)).toBeCloseTo(0.2, 12);
  });
});
