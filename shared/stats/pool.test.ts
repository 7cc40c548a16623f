import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { pool, type PoolOptions } from './pool.ts';

const cells = fc.array(
  fc.record({
    estimate: fc.double({ min: -10, max: 10, noNaN: true }),
    se: fc.double({ min: 0.05, max: 5, noNaN: true }),
  }),
  { minLength: 2, maxLength: 20 },
);
const options = fc.record<Required<PoolOptions>>({
  level: fc.constantFrom(0.8, 0.95),
  method: fc.constantFrom('paule-mandel', 'dersimonian-laird'),
  interval: fc.constantFrom('normal', 'hartung-knapp'),
});
const estimatesOf = (list: { estimate: number }[]) => list.map(({ estimate }) => estimate);
const errorsOf = (list: { se: number }[]) => list.map(({ se }) => se);
const near = (a: number, b: number, size: number) =>
  expect(Math.abs(a - b)).toBeLessThanOrEqual(1e-9 * Math.max(1, size));

describe('pool', () => {
  it('moves with a shift, stretches with a factor and turns with the sign', () => {
    fc.assert(
      fc.property(
        cells,
        options,
        fc.double({ min: -50, max: 50, noNaN: true }),
        fc.double({ min: 0.1, max: 10, noNaN: true }),
        fc.constantFrom(1, -1),
        (list, chosen, shift, factor, sign) => {
          const plain = pool(estimatesOf(list), errorsOf(list), chosen);
          fc.pre(plain.se !== null && plain.q > 1e-6);
          const change = (value: number) => shift + sign * factor * value;
          const moved = pool(
            estimatesOf(list).map(change),
            errorsOf(list).map((se) => factor * se),
            chosen,
          );
          const size = 1e3;
          near(moved.estimate, change(plain.estimate), size);
          near(moved.tau2, factor * factor * plain.tau2, size * plain.q);
          near(moved.iSquared, plain.iSquared, size);
          plain.cells!.forEach((cell, i) => {
            near(moved.cells![i]!.estimate, change(cell.estimate), size * plain.q);
            near(moved.cells![i]!.interval[sign > 0 ? 0 : 1], change(cell.interval[0]), size * plain.q);
          });
        },
      ),
    );
  });

  it('does not depend on the order of the cells', () => {
    fc.assert(
      fc.property(cells, options, (list, chosen) => {
        const plain = pool(estimatesOf(list), errorsOf(list), chosen);
        const turned = [...list].reverse();
        const back = pool(estimatesOf(turned), errorsOf(turned), chosen);
        near(back.estimate, plain.estimate, 10);
        near(back.q, plain.q, plain.q);
        near(back.tau2, plain.tau2, plain.q);
      }),
    );
  });

  it('solves the equation of Paule and Mandel, or has no spread where the errors explain all of it', () => {
    fc.assert(
      fc.property(cells, (list) => {
        const { pauleMandel, q } = pool(estimatesOf(list), errorsOf(list));
        const { tau2, estimate } = pauleMandel;
        const left = list.reduce(
          (sum, cell) => sum + (cell.estimate - estimate) ** 2 / (cell.se ** 2 + tau2),
          0,
        );
        if (tau2 === 0) expect(q).toBeLessThanOrEqual(list.length - 1 + 1e-9);
        else expect(left).toBeCloseTo(list.length - 1, 8);
      }),
    );
  });

  it('holds the estimate in its interval, which grows with the level, and cells between own and mean', () => {
    fc.assert(
      fc.property(cells, options, (list, { method, interval }) => {
        const [narrow, wide] = [0.7, 0.99].map((level) =>
          pool(estimatesOf(list), errorsOf(list), { method, interval, level }),
        );
        fc.pre(narrow!.interval !== null);
        const { estimate } = narrow!;
        expect(narrow!.interval![0] < estimate && estimate < narrow!.interval![1]).toBe(true);
        expect(wide!.interval![0] < narrow!.interval![0] && narrow!.interval![1] < wide!.interval![1]).toBe(
          true,
        );
        narrow!.cells!.forEach((cell, i) => {
          const own = list[i]!.estimate;
          expect(cell.estimate).toBeGreaterThanOrEqual(Math.min(own, estimate) - 1e-12);
          expect(cell.estimate).toBeLessThanOrEqual(Math.max(own, estimate) + 1e-12);
          expect(cell.weight >= 0 && cell.weight < 1).toBe(true);
        });
      }),
    );
  });

  it('works out by hand for two cells of equal error', () => {
    // Q = 8; Paule-Mandel and DerSimonian-Laird both give tau^2 = 8 - 1 = 7; lambda = 7/8.
    const { estimate, tau2, dersimonianLaird, q, iSquared, cells: shrunk, se } = pool([0, 4], [1, 1]);
    expect([estimate, q, iSquared]).toEqual([2, 8, 0.875]);
    expect(tau2).toBeCloseTo(7, 12);
    expect(dersimonianLaird.tau2).toBeCloseTo(7, 12);
    expect(se).toBeCloseTo(2, 12);
    expect(shrunk!.map((cell) => cell.estimate)).toEqual([
      expect.closeTo(0.25, 12),
      expect.closeTo(3.75, 12),
    ]);
    expect(shrunk![0]!.se).toBeCloseTo(Math.sqrt(7 / 8 + 4 / 64), 12);
  });

  it('draws equal cells fully together', () => {
    const result = pool([1.5, 1.5, 1.5], [0.3, 0.4, 2]);
    expect(result).toMatchObject({ tau2: 0, q: 0, iSquared: 0, qP: 1, reason: null });
    expect(result.cells!.map(({ estimate, weight }) => [estimate, weight])).toEqual([
      [1.5, 0],
      [1.5, 0],
      [1.5, 0],
    ]);
    expect(pool([1.5, 1.5], [1, 1], { interval: 'hartung-knapp' })).toMatchObject({
      se: null,
      interval: null,
      cells: null,
      reason: 'no-spread',
    });
  });

  it('says of a single cell what that cell says', () => {
    const result = pool([2], [0.5]);
    expect(result).toMatchObject({ k: 1, estimate: 2, se: 0.5, tau2: 0, q: 0, qP: null, iSquared: 0 });
    expect(result.interval![1]).toBeCloseTo(2 + 0.5 * 1.959963984540054, 12);
    expect(pool([2], [0.5], { interval: 'hartung-knapp' })).toMatchObject({ se: null, reason: 'one-cell' });
  });

  it('names the argument it refuses', () => {
    expect(() => pool([], [])).toThrow(/^estimates /);
    expect(() => pool([1, Number.NaN], [1, 1])).toThrow(/^estimates /);
    expect(() => pool([1, 2], [1])).toThrow(/^standardErrors /);
    expect(() => pool([1, 2], [1, 0])).toThrow(/^standardErrors\[1\] /);
    expect(() => pool([1, 2], [1, 1e-200])).toThrow(/^standardErrors\[1\] /);
    expect(() => pool([1, 2], [1, 1], { level: 0 })).toThrow(/^level /);
    expect(() => pool([1], [1], { method: 'mean' as 'paule-mandel' })).toThrow(/^method /);
    expect(() => pool([1], [1], { interval: 't' as 'normal' })).toThrow(/^interval /);
  });
});
