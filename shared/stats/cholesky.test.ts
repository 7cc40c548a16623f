import { describe, expect, it } from 'vitest';
import { choleskyFactor, choleskyInverse, choleskySolve } from './cholesky.ts';
import { createRandom } from './random.ts';

/** A'A of a random square matrix, and A. */
function draw(seed: number, d: number): Float64Array {
  const random = createRandom(seed);
  const a = Array.from({ length: d }, () => Array.from({ length: d }, () => random.normal()));
  return Float64Array.from({ length: d * d }, (_, at) =>
    a.reduce((sum, row) => sum + row[Math.floor(at / d)]! * row[at % d]!, 0),
  );
}

describe('Cholesky factors', () => {
  it('solve what multiplying back gives again', () => {
    for (let d = 1; d <= 7; d++) {
      const matrix = draw(d, d);
      const b = Float64Array.from({ length: d }, (_, i) => i - 2.5);
      const factor = choleskyFactor(matrix, d)!;
      const x = choleskySolve(factor, b);
      const inverse = choleskyInverse(factor, d);
      for (let i = 0; i < d; i++) {
        let [product, applied] = [0, 0];
        for (let j = 0; j < d; j++) {
          product += matrix[i * d + j]! * x[j]!;
          applied += inverse[i * d + j]! * b[j]!;
        }
        expect(product).toBeCloseTo(b[i]!, 8);
        expect(applied).toBeCloseTo(x[i]!, 8);
      }
    }
  });

  it('refuse a matrix that is not positive definite', () => {
    expect(choleskyFactor(Float64Array.of(1, 2, 2, 4), 2)).toBeNull();
    expect(choleskyFactor(Float64Array.of(1, 2, 2, 3), 2)).toBeNull();
    expect(choleskyFactor(Float64Array.of(0), 1)).toBeNull();
  });
});
