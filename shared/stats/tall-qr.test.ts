import { describe, expect, it } from 'vitest';
import { createRandom } from './random.ts';
import { triangularFactor } from './tall-qr.ts';

describe('triangularFactor', () => {
  it('keeps all inner products of scaled columns over many blocks of rows', () => {
    const random = createRandom(4);
    const n = 1000;
    const columns = Array.from({ length: 3 }, () => Float64Array.from({ length: n }, () => random.normal()));
    const last = Float64Array.from({ length: n }, () => random.normal());
    const rowScale = Float64Array.from({ length: n }, () => 0.5 + random.uniform());
    const scales = [1, 2, 0.25];
    const r = triangularFactor(columns, scales, last, rowScale);
    const all = [
      ...columns.map((column, j) => column.map((value, i) => value * scales[j]! * rowScale[i]!)),
      last.map((value, i) => value * rowScale[i]!),
    ];
    for (let a = 0; a < 3; a++) {
      for (let i = a + 1; i < 3; i++) expect(r[i * 4 + a]).toBe(0);
      for (let b = 0; b < 4; b++) {
        const rebuilt = [0, 1, 2].reduce((sum, i) => sum + r[i * 4 + a]! * r[i * 4 + b]!, 0);
        const direct = all[a]!.reduce((sum, value, i) => sum + value * all[b]![i]!, 0);
        expect(rebuilt).toBeCloseTo(direct, 9);
      }
    }
  });

  it('leaves a zero row for a column of zeros, and has no rows without columns', () => {
    const zero = triangularFactor([new Float64Array(5)], [1], Float64Array.of(1, 2, 3, 4, 5), null);
    expect([...zero]).toEqual([0, 0]);
    expect(triangularFactor([], [], Float64Array.of(1), null)).toHaveLength(0);
  });
});
