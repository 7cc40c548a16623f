import { describe, expect, it } from 'vitest';
import { confidenceSequence } from '../../../shared/stats/index.ts';
import { Mismatches, readReference } from './compare.ts';

interface SequenceCase {
  d: number[];
  level: number;
  from: number;
  tuned: number | null;
  rho: number;
  at: number[];
  mean: number[];
  lo: (number | null)[];
  hi: (number | null)[];
}

describe('confidenceSequence against R 4.2.2 mean, sd and gsl::lambert_Wm1', () => {
  it('equals the whole line on 220 seeded lists', () => {
    const off = new Mismatches();
    readReference<SequenceCase>('confidence-sequence').forEach((c, i) => {
      const { level, from } = c;
      const how = c.tuned === null ? { rho: c.rho } : { tunedFor: c.tuned };
      const result = confidenceSequence(c.d, { level, from, ...how });
      off.check(`case ${i} rho`, result.rho, c.rho, 1e-12);
      const size = 1e-13 * Math.max(...c.d.map(Math.abs));
      c.at.forEach((t, j) => {
        const point = result.line[t - 1]!;
        off.check(`case ${i} mean ${t}`, point.estimate, c.mean[j]!, 1e-8, size);
        off.check(`case ${i} low ${t}`, point.interval && point.interval[0], c.lo[j]!, 1e-8, size);
        off.check(`case ${i} high ${t}`, point.interval && point.interval[1], c.hi[j]!, 1e-8, size);
      });
    });
    expect(off.found).toEqual([]);
    expect(off.compared).toBeGreaterThan(10_000);
  });
});
