import { describe, expect, it } from 'vitest';
import { mean, sampleCorrelation, sampleStandardDeviation } from 'simple-statistics';
import { noiseKey, normalAt, smoothNoise, uniformAt } from './hash-noise.ts';

const steps = Array.from({ length: 40_000 }, (_, i) => i);

describe('noise by key and time', () => {
  it('is uniform over its range, with every tenth equally full', () => {
    const key = noiseKey(7, 1);
    const counts = new Array<number>(10).fill(0);
    for (const step of steps) counts[Math.floor(10 * uniformAt(key, step))]! += 1;
    // Chi-squared with 9 degrees of freedom: 27.9 is its 99.9th percentile (tables).
    const chiSquared = counts.reduce((sum, count) => sum + (count - 4_000) ** 2 / 4_000, 0);
    expect(chiSquared).toBeLessThan(27.9);
  });

  it('is normal: mean 0, deviation 1, and 4.55 % beyond two deviations', () => {
    const values = steps.map((step) => normalAt(noiseKey(7, 2), step));
    expect(mean(values)).toBeCloseTo(0, 1);
    expect(sampleStandardDeviation(values)).toBeCloseTo(1, 1);
    expect(values.filter((value) => Math.abs(value) > 2).length / values.length).toBeCloseTo(0.0455, 2);
  });

  it('differs between neighbouring keys and neighbouring steps', () => {
    const one = steps.map((step) => normalAt(noiseKey(7, 3), step));
    const other = steps.map((step) => normalAt(noiseKey(7, 4), step));
    expect(Math.abs(sampleCorrelation(one, other))).toBeLessThan(0.02);
    expect(Math.abs(sampleCorrelation(one.slice(1), one.slice(0, -1)))).toBeLessThan(0.02);
  });

  it('depends on the order of the parts of a key', () => {
    expect(noiseKey(1, 2)).not.toBe(noiseKey(2, 1));
    expect(noiseKey(1)).not.toBe(noiseKey(1, 0));
  });

  it('keeps its spread between the knots and moves slowly', () => {
    const knotSeconds = 60;
    const startMs = Date.parse('2026-01-05T00:00:00Z');
    // Tens of thousands of independent stretches, each seen at its middle and two seconds later.
    const middles = steps.map((i) => smoothNoise(noiseKey(9, i), startMs + 30_000, knotSeconds));
    const later = steps.map((i) => smoothNoise(noiseKey(9, i), startMs + 32_000, knotSeconds));
    const farLater = steps.map((i) => smoothNoise(noiseKey(9, i), startMs + 200_000, knotSeconds));
    expect(sampleStandardDeviation(middles)).toBeCloseTo(1, 1);
    expect(sampleCorrelation(middles, later)).toBeGreaterThan(0.98);
    expect(Math.abs(sampleCorrelation(middles, farLater))).toBeLessThan(0.02);
  });
});
