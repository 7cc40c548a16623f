import { describe, expect, it } from 'vitest';
import * as beta from '../../../shared/stats/distributions/beta.ts';
import * as binomial from '../../../shared/stats/distributions/binomial.ts';
import * as chi from '../../../shared/stats/distributions/chi-squared.ts';
import * as fisher from '../../../shared/stats/distributions/fisher.ts';
import * as normal from '../../../shared/stats/distributions/normal.ts';
import * as student from '../../../shared/stats/distributions/student.ts';
import { Mismatches, readReference } from './compare.ts';

interface Case {
  fn: string;
  x: number;
  args: number[] | number;
  lower: number;
  upper: number;
  side: 'lower' | 'upper';
  quantile: number | null;
  pmf?: number;
  median?: number[];
}

type Fn = (x: number, ...args: number[]) => number;
const functions: Record<string, { lower: Fn; upper: Fn; fromLower?: Fn; fromUpper?: Fn }> = {
  normal: {
    lower: normal.normalCdf,
    upper: normal.normalUpper,
    fromLower: normal.normalQuantile,
    fromUpper: normal.normalUpperQuantile,
  },
  t: {
    lower: student.tCdf as Fn,
    upper: student.tUpper as Fn,
    fromLower: student.tQuantile as Fn,
    fromUpper: student.tUpperQuantile as Fn,
  },
  chiSquared: {
    lower: chi.chiSquaredCdf as Fn,
    upper: chi.chiSquaredUpper as Fn,
    fromLower: chi.chiSquaredQuantile as Fn,
    fromUpper: chi.chiSquaredUpperQuantile as Fn,
  },
  f: {
    lower: fisher.fCdf as Fn,
    upper: fisher.fUpper as Fn,
    fromLower: fisher.fQuantile as Fn,
    fromUpper: fisher.fUpperQuantile as Fn,
  },
  beta: {
    lower: beta.betaCdf as Fn,
    upper: beta.betaUpper as Fn,
    fromLower: beta.betaQuantile as Fn,
    fromUpper: beta.betaUpperQuantile as Fn,
  },
  binomial: { lower: binomial.binomialCdf as Fn, upper: binomial.binomialUpper as Fn },
};

const cases = readReference<Case>('distributions');

describe('distributions against R 4.2.2 (pnorm, pt, pchisq, pf, pbeta, pbinom and their quantiles)', () => {
  it.each(Object.keys(functions))(
    '%s: both tails and the quantile agree to 1e-9 relative, far tails too',
    (name) => {
      const off = new Mismatches();
      const fn = functions[name]!;
      for (const c of cases.filter(({ fn }) => fn === name)) {
        const args = [c.args].flat();
        const label = `${name}(${[c.x, ...args].join(', ')})`;
        off.check(`${label} lower`, fn.lower(c.x, ...args), c.lower, 1e-9, 1e-290);
        off.check(`${label} upper`, fn.upper(c.x, ...args), c.upper, 1e-9, 1e-290);
        if (c.quantile !== null && fn.fromLower && fn.fromUpper) {
          const quantile =
            c.side === 'lower' ? fn.fromLower(c.lower, ...args) : fn.fromUpper(c.upper, ...args);
          // At the centre of a symmetric distribution the quantile is zero up to the probability's own digits.
          off.check(`${label} quantile`, quantile, c.quantile, 1e-9, 1e-14);
        }
        if (c.pmf !== undefined && c.median) {
          off.check(`${label} mass`, binomial.binomialPmf(c.x, args[0]!, args[1]!), c.pmf, 1e-9);
          [0.025, 0.5, 0.975].forEach((p, i) =>
            off.check(
              `${label} quantile ${p}`,
              binomial.binomialQuantile(p, args[0]!, args[1]!),
              c.median![i]!,
              0,
            ),
          );
        }
      }
      expect(off.found).toEqual([]);
      expect(off.compared).toBeGreaterThan(100);
    },
  );
});
