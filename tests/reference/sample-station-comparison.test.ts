import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { answerComparison } from '../../shared/comparison/index.ts';
import { askSample as ask } from './sample-station/ask.ts';

/**
 * The sample station's comparisons were worked independently in R 4.2.2 (data.table, sandwich) from the
 * rules of the method: counts exact, estimates to 1e-6, rank values to 0.01. The data are invented.
 */
const expected = JSON.parse(readFileSync(new URL('sample-station/expected.json', import.meta.url), 'utf8'));

interface Worked {
  units: number;
  clusters: number;
  stations: number;
  nights: number;
  estimate: number;
  se: number;
  lo: number;
  hi: number;
  hl: number;
  meanClusters: number;
  offsets: number | number[];
}

describe('the sample station against the same method worked in R', () => {
  for (const set of ['swap', 'alternate'] as const) {
    const questions = [
      ['all bands', {}, expected[set].all],
      ...Object.entries(expected[set].byBand).map(([band, worked]) => [
        `${band} m`,
        { bandsMetres: [Number(band)] },
        worked,
      ]),
    ] as [string, object, Worked][];
    for (const [label, change, worked] of questions) {
      it(`gives the counts, estimate, interval and offsets of R for ${set}, ${label}`, () => {
        const answer = answerComparison(ask(set, 'ALPHA', 'BRAVO', change));
        expect(answer.counts).toMatchObject({
          units: worked.units,
          clusters: worked.clusters,
          stations: worked.stations,
          nights: worked.nights,
        });
        expect(answer.estimate!.estimateDb).toBeCloseTo(worked.estimate, 6);
        expect(answer.estimate!.seDb).toBeCloseTo(worked.se, 6);
        expect(answer.estimate!.interval95Db[0]).toBeCloseTo(worked.lo, 6);
        expect(answer.estimate!.interval95Db[1]).toBeCloseTo(worked.hi, 6);
        const offsets = [worked.offsets].flat();
        expect(answer.offsets.map((o) => o.offsetDb)).toHaveLength(offsets.length);
        answer.offsets.forEach((o, k) => expect(o.offsetDb).toBeCloseTo(offsets[k]!, 6));
        expect(answer.rank!.clusterMeanDb).toBeCloseTo(worked.meanClusters, 6);
        expect(Math.abs(answer.rank!.hodgesLehmannDb - worked.hl)).toBeLessThanOrEqual(0.01);
      });
    }
  }

  it('turns the answer round when the antennas are named the other way', () => {
    const answer = answerComparison(ask('swap', 'BRAVO', 'ALPHA'));
    expect(answer.estimate!.estimateDb).toBeCloseTo(-expected.swap.all.estimate, 6);
    expect(answer.estimate!.interval95Db[0]).toBeCloseTo(-expected.swap.all.hi, 6);
  });

  it('says that ALPHA and CHARLIE cannot be separated in swap, and what would help', () => {
    const answer = answerComparison(ask('swap', 'ALPHA', 'CHARLIE'));
    expect(answer.verdict.code).toBe('cannot be separated');
    expect(answer.estimate).toBeNull();
    expect(answer.verdict.sentence).toContain('CHARLIE only on EI7QSD');
    expect(answer.verdict.cures[0]).toContain('Swap the two antennas for about 40 minutes');
    expect(answer.counts.units).toBeGreaterThan(0);
  });

  it('gives the whole estimate back when all nights or all bands are asked for as cells', () => {
    const answer = answerComparison(ask('alternate', 'ALPHA', 'BRAVO'));
    const weighted =
      answer.nights.reduce((sum, cell) => sum + cell.estimateDb! * cell.units, 0) / answer.counts.units;
    expect(weighted).toBeCloseTo(expected.alternate.all.estimate, 6);
    expect(answer.bandHours.cells.reduce((sum, cell) => sum + cell.units, 0)).toBe(answer.counts.units);
    expect(answer.histogram.bins.reduce((sum, bin) => sum + bin.units, 0)).toBe(answer.counts.units);
  });
});
