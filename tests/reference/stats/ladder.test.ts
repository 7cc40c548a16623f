import { describe, expect, it } from 'vitest';
import { ladder } from '../../../shared/stats/index.ts';
import type { LadderEstimate, LadderResult } from '../../../shared/stats/index.ts';
import { Mismatches, readReference } from './compare.ts';

/** Estimate, standard error, p, low, high. */
type Five = [number, number | null, number | null, number | null, number | null];
interface Case {
  kind: string;
  level: number;
  reference: number | null;
  antennaA: number[];
  antennaB: number[];
  receiverA: number[];
  receiverB: number[];
  difference: number[];
  cluster: number[];
  weights: number[] | null;
  rank: number;
  df: number;
  residualVariance: number | null;
  groups: number[][];
  antennas: { id: number; value: Five | null }[];
  receivers: { id: number; value: Five | null }[] | null;
  chances: ({ ids: number[]; chance: number[] } | null)[];
  pairs: {
    a: number;
    b: number;
    whole: Five;
    rows: number;
    clusters: number;
    weightShare: number;
    inconsistency?: Five | null;
    indirect?: Five | null;
    direct?: Five | null;
  }[];
}

const cases = readReference<Case>('ladder');
const fit = (c: Case): LadderResult =>
  ladder(
    {
      antennaA: c.antennaA,
      antennaB: c.antennaB,
      receiverA: c.receiverA,
      receiverB: c.receiverB,
      difference: c.difference,
      clusters: c.cluster,
    },
    { level: c.level, reference: c.reference ?? undefined, weights: c.weights ?? undefined },
  );
const fits = cases.map(fit);

/** Differences of sums of size `scale` that come out near zero keep its rounding. */
function checkFive(off: Mismatches, label: string, own: LadderEstimate | null, r: Five, scale: number): void {
  if (!own) {
    off.check(`${label} estimate`, null, r[0]);
    return;
  }
  const [estimate, se, p, low, high] = r;
  off.check(`${label} estimate`, own.estimate, estimate, 1e-8, 1e-12 * scale);
  off.check(`${label} se`, own.se, se, 1e-8);
  // A p moves by more than its estimate: relative to t times the density's slope.
  off.check(`${label} p`, own.p, p, 1e-8, 1e-12);
  off.check(`${label} low`, own.interval?.[0] ?? null, low, 1e-8, 1e-12 * scale);
  off.check(`${label} high`, own.interval?.[1] ?? null, high, 1e-8, 1e-12 * scale);
}
const scaleOf = (c: Case) => Math.max(...c.difference.map(Math.abs));

describe('ladder against R 4.2.2 lm with sandwich::vcovCL(type = "HC1", cadjust = TRUE) on 242 seeded graphs', () => {
  it('puts the same antennas on one scale as the null space of the full design in R', () => {
    cases.forEach((c, i) => {
      const ascending = (groups: number[][]) =>
        groups.map((group) => [...group].sort((a, b) => a - b)).sort((a, b) => a[0]! - b[0]!);
      expect(ascending(fits[i]!.groups), `case ${i}`).toEqual(ascending(c.groups));
      expect(fits[i]!.rank, `case ${i}`).toBe(c.rank);
    });
    // Both are there: one scale for all, and several.
    expect(cases.filter(({ groups }) => groups.length > 1).length).toBeGreaterThan(40);
    expect(cases.filter(({ groups }) => groups.length === 1).length).toBeGreaterThan(100);
  });

  it('equals its values, receiver offsets, errors and intervals', () => {
    const off = new Mismatches();
    let without = 0;
    cases.forEach((c, i) => {
      const own = fits[i]!;
      off.check(`case ${i} df`, own.df, c.df, 0);
      off.check(`case ${i} variance`, own.residualVariance, c.residualVariance, 1e-8, 1e-20);
      for (const [rungs, expected] of [
        [own.antennas, c.antennas],
        [own.receivers, c.receivers ?? []],
      ] as const) {
        expect(rungs.map(({ id }) => id).sort((a, b) => a - b)).toEqual(
          expected.map(({ id }) => id).sort((a, b) => a - b),
        );
        for (const { id, value } of expected) {
          const rung = rungs.find((each) => each.id === id)!;
          const label = `case ${i} (${c.kind}) id ${id}`;
          if (value === null) {
            expect([rung.value, rung.reason], label).toEqual([null, 'alone']);
            continue;
          }
          if (value[1] === null) without += 1;
          off.check(`${label} value`, rung.value, value[0], 1e-8, 1e-12 * scaleOf(c));
          off.check(`${label} se`, rung.se, value[1]);
          off.check(`${label} low`, rung.interval?.[0] ?? null, value[3], 1e-8, 1e-12 * scaleOf(c));
          off.check(`${label} high`, rung.interval?.[1] ?? null, value[4], 1e-8, 1e-12 * scaleOf(c));
        }
      }
    });
    expect(off.found).toEqual([]);
    expect(off.compared).toBeGreaterThan(5000);
    expect(without).toBeGreaterThan(40);
  });

  it('equals every difference of two antennas, and the share of leverage that its own rows have (hatvalues)', () => {
    const off = new Mismatches();
    cases.forEach((c, i) => {
      expect(fits[i]!.pairs.length, `case ${i}`).toBe(c.pairs.length);
      for (const expected of c.pairs) {
        const label = `case ${i} (${c.kind}) pair ${expected.a}, ${expected.b}`;
        const own = fits[i]!.pairs.find(({ a, b }) => a === expected.a && b === expected.b)!;
        checkFive(off, label, own, expected.whole, scaleOf(c));
        off.check(`${label} rows`, own.rows, expected.rows, 0);
        off.check(`${label} clusters`, own.clusters, expected.clusters, 0);
        off.check(`${label} weight`, own.weightShare, expected.weightShare, 1e-8, 1e-12);
      }
    });
    expect(off.found).toEqual([]);
    expect(off.compared).toBeGreaterThan(10_000);
  });

  it('splits each pair as an lm with one more column does: direct, indirect and their difference', () => {
    const off = new Mismatches();
    let split = 0;
    cases.forEach((c, i) => {
      for (const expected of c.pairs) {
        const label = `case ${i} (${c.kind}) pair ${expected.a}, ${expected.b}`;
        const own = fits[i]!.pairs.find(({ a, b }) => a === expected.a && b === expected.b)!;
        if (expected.rows === 0) {
          expect([own.direct, own.inconsistency, own.directShare], label).toEqual([null, null, null]);
          expect(own.indirect!.estimate, label).toBe(own.estimate);
          continue;
        }
        if (!expected.inconsistency) {
          expect(own.inconsistency, label).toBeNull();
          continue;
        }
        split += 1;
        checkFive(off, `${label} inconsistency`, own.inconsistency, expected.inconsistency, scaleOf(c));
        checkFive(off, `${label} indirect`, own.indirect, expected.indirect!, scaleOf(c));
        checkFive(off, `${label} direct`, own.direct, expected.direct!, scaleOf(c));
        // The whole is the two parts, each with its share.
        const mixed =
          own.directShare! * own.direct!.estimate + (1 - own.directShare!) * own.indirect!.estimate;
        off.check(`${label} shares`, mixed, expected.whole[0], 1e-8, 1e-10 * scaleOf(c));
      }
    });
    expect(off.found).toEqual([]);
    expect(split).toBeGreaterThan(1000);
  });

  it('finds the chance of being best that draws in R find', () => {
    let compared = 0;
    cases.forEach((c, i) => {
      for (const best of c.chances) {
        if (!best) continue;
        best.ids.forEach((id, k) => {
          const own = fits[i]!.antennas.find((antenna) => antenna.id === id)!;
          // Both are shares of 20,000 draws: five standard errors of their difference are 0.025.
          expect(
            Math.abs(own.chanceBest! - best.chance[k]!),
            `case ${i} id ${id}: ${own.chanceBest}, R ${best.chance[k]}`,
          ).toBeLessThan(0.025);
          compared += 1;
        });
      }
    });
    expect(compared).toBeGreaterThan(500);
  });
});
