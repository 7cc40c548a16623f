import { describe, expect, it } from 'vitest';
import { noncentralTCdf, noncentralTUpper } from '../../../shared/stats/distributions/noncentral-t.ts';
import { confidenceSequence, sampleSize } from '../../../shared/stats/index.ts';
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

interface PlanCase {
  sd: number;
  level: number;
  power: number;
  difference: number;
  n: number;
  strict: boolean;
  needed?: number | null;
  reached: number;
  detectable?: number | null;
  half: number;
  forHalf?: number | null;
  width: number;
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

describe('sampleSize against R 4.2.2 power.t.test(type = "paired") and uniroot on qt', () => {
  it('equals n, power, detectable difference and half-width on 240 seeded plans', () => {
    const off = new Mismatches();
    let [small, rough] = [0, 0];
    readReference<PlanCase>('sample-size').forEach((c, i) => {
      const { sd, level, power, difference, n } = c;
      const base = { sd, level, bothTails: c.strict };
      const needed = sampleSize({ ...base, difference, power }).n;
      // R's root search has no answer where two values are enough.
      if (c.needed) off.check(`case ${i} n`, needed, c.needed, 1e-8);
      else off.check(`case ${i} n`, needed, 2, 0);
      if (!c.needed) small += 1;
      // The noncentral t of R stops its series at 1e-12, which is all there is of a small power.
      off.check(`case ${i} power`, sampleSize({ ...base, n, difference }).power, c.reached, 1e-8, 1e-11);
      const detectable = sampleSize({ ...base, n, power }).difference;
      if (c.detectable) off.check(`case ${i} difference`, detectable, c.detectable, 1e-8);
      else rough += 1;
      const wide = sampleSize({ ...base, halfWidth: c.half }).n;
      off.check(`case ${i} n for width`, wide, c.forHalf ?? 2, 1e-8);
      off.check(`case ${i} width`, sampleSize({ ...base, n }).halfWidth, c.width, 1e-8);
    });
    expect(off.found).toEqual([]);
    expect(small).toBeLessThan(30);
    expect(rough).toBeLessThan(10);
  });

  it('rests on a noncentral t that equals pt(ncp) on 336 points', () => {
    const off = new Mismatches();
    readReference<Record<'t' | 'df' | 'ncp' | 'lower' | 'upper', number>>('noncentral-t').forEach(
      ({ t, df, ncp, lower, upper }) => {
        const label = `${t}, ${df}, ${ncp}`;
        off.check(`${label} lower`, noncentralTCdf(t, df, ncp), lower, 1e-9, 3e-12);
        off.check(`${label} upper`, noncentralTUpper(t, df, ncp), upper, 1e-9, 3e-12);
      },
    );
    expect(off.found).toEqual([]);
    expect(off.compared).toBe(672);
  });
});
