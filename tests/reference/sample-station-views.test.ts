import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { answerComparison, unitVariants } from '../../shared/comparison/index.ts';
import { hearingLimits } from '../../shared/comparison/censored.ts';
import { askSample } from './sample-station/ask.ts';

/**
 * The further views of the sample station's ALPHA against BRAVO, worked in R 4.2.2 by sample-station/views.R
 * (sandwich, survival, power.t.test) from the same units; the units themselves are held against an independent
 * pairing in sample-station-pairing.test.ts. Maximum likelihood to 1e-6, all else to 1e-8.
 */
const worked = JSON.parse(readFileSync(new URL('sample-station/views.json', import.meta.url), 'utf8'));

describe.each(['swap', 'alternate'] as const)('further views of %s against R', (set) => {
  const r = worked[set];
  const input = askSample(set, 'ALPHA', 'BRAVO');
  const answer = answerComparison(input);
  const variants = new Map(unitVariants(input).map((variant) => [variant.key, variant]));

  it.each([
    ['as-asked', 'oneWay'],
    ['clusters-two-way', 'twoWay'],
    ['without-heaviest', 'withoutHeaviest'],
    ['equal-stations', 'equalStations'],
  ])('gives the estimate and interval of R for the choice %s', (key, name) => {
    const variant = variants.get(key)!;
    expect(variant.units).toBe(r[name].units);
    expect(variant.estimateDb).toBeCloseTo(r[name].estimate, 8);
    expect(variant.intervalDb![0]).toBeCloseTo(r[name].lo, 8);
    expect(variant.intervalDb![1]).toBeCloseTo(r[name].hi, 8);
  });

  it('reads the limits of the receivers off the same spots', () => {
    const limits = hearingLimits(input.nights);
    const callSign = new Map(input.receivers.map(({ id, callSign: name }) => [id, name]));
    const named = Object.fromEntries(
      [...limits].map(([key, limit]) => {
        const [receiver, band] = key.split(' ');
        return [`${callSign.get(Number(receiver))} ${band}`, limit];
      }),
    );
    for (const { rx, band, snr_db } of r.limits as { rx: string; band: number; snr_db: number }[]) {
      expect(named[`${rx} ${band}`]).toBeCloseTo(snr_db, 10);
    }
    expect(Object.keys(named)).toHaveLength(r.limits.length);
  });

  it('counts stations heard on one antenna only as censored differences', () => {
    expect(answer.censored).toMatchObject({ onlyA: r.censored.onlyA, onlyB: r.censored.onlyB });
    expect(answer.censored!.estimateDb).toBeCloseTo(r.censored.estimate, 6);
    expect(answer.censored!.seDb).toBeCloseTo(r.censored.se, 6);
    expect(answer.censored!.spreadDb).toBeCloseTo(r.censored.sd, 6);
  });

  it('draws the peek-proof interval night by night', () => {
    const { points } = answer.peekProof!;
    expect(points.map(({ clusters }) => clusters)).toEqual(
      r.peek.map((p: { clusters: number }) => p.clusters),
    );
    points.forEach((point, k) => {
      expect(point.estimateDb).toBeCloseTo(r.peek[k].estimate, 8);
      if (k < 2) expect(point.intervalDb).toBeNull();
      else {
        const [lo, hi] = point.intervalDb!;
        // The width at the tuned time is flat in rho: R's search for it is good to far better than this.
        expect((hi - lo) / 2).toBeCloseTo(r.peek[k].sdSample, 7);
        expect((hi + lo) / 2).toBeCloseTo(r.peek[k].estimate, 8);
      }
    });
  });

  it('gives each night the interval of its own clusters', () => {
    expect(answer.nights).toHaveLength(r.cells.estimate.length);
    answer.nights.forEach((cell, k) => {
      expect(cell.estimateDb).toBeCloseTo(r.cells.estimate[k], 8);
      expect(cell.intervalDb![0]).toBeCloseTo(r.cells.lo[k], 8);
      expect(cell.intervalDb![1]).toBeCloseTo(r.cells.hi[k], 8);
    });
  });

  it('pools the nights', () => {
    const { nights } = answer.pooling;
    expect(nights!.cells).toBe(r.pooling.cells);
    expect(nights!.tauDb ** 2).toBeCloseTo(r.pooling.tau2, 8);
    expect(nights!.meanDb).toBeCloseTo(r.pooling.mean, 8);
  });

  it('plans with the spread that it found', () => {
    const planning = answer.planning!;
    expect(planning.spreadDb).toBeCloseTo(r.planning.spread, 8);
    expect(planning.power.clusters).toBe(Math.ceil(r.planning.power));
    expect(planning.detectableDb).toBeCloseTo(r.planning.detectable, 4);
    expect(planning.precision.map(({ clusters }) => clusters)).toEqual(
      r.planning.halfWidths.map((n: number) => Math.ceil(n)),
    );
  });
});
