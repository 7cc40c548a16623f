import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { intervalTerms, noTerms, oneSidedTerms, type RowTerms } from './censored-likelihood.ts';

type Fill = (out: RowTerms, eta: number, tau: number) => void;
const filled = (fill: Fill, eta: number, tau: number) => {
  const terms = noTerms();
  fill(terms, eta, tau);
  return terms;
};

/** Derivatives by symmetric differences of the log and of the first derivatives. */
function slopes(fill: Fill, eta: number, tau: number) {
  const step = 1e-5;
  const by = (pick: (terms: RowTerms) => number, [e, t]: [number, number]) =>
    (pick(filled(fill, eta + e, tau + t)) - pick(filled(fill, eta - e, tau - t))) / (2 * step);
  return {
    byEta: by(({ log }) => log, [step, 0]),
    byTau: by(({ log }) => log, [0, step]),
    etaEta: -by(({ byEta }) => byEta, [step, 0]),
    etaTau: -by(({ byEta }) => byEta, [0, step]),
    tauTau: -by(({ byTau }) => byTau, [0, step]),
  };
}

function expectSlopes(fill: Fill, eta: number, tau: number): void {
  const terms = filled(fill, eta, tau);
  const numeric = slopes(fill, eta, tau);
  for (const key of Object.keys(numeric) as (keyof typeof numeric)[]) {
    const size = Math.max(1, Math.abs(numeric[key]), Math.abs(terms.log));
    expect(Math.abs(terms[key] - numeric[key]), `${key} at ${eta}, ${tau}`).toBeLessThan(2e-5 * size);
  }
}

const etas = fc.double({ min: -6, max: 6, noNaN: true });
const taus = fc.double({ min: 0.2, max: 3, noNaN: true });
const bounds = fc.double({ min: -8, max: 8, noNaN: true });

describe('terms of censored rows', () => {
  it('have the derivatives of their own logarithm, one-sided', () => {
    fc.assert(
      fc.property(bounds, etas, taus, fc.constantFrom(1 as const, -1 as const), (bound, eta, tau, side) => {
        expectSlopes((out, e, t) => oneSidedTerms(out, bound, side, e, t), eta, tau);
      }),
    );
  });

  it('have the derivatives of their own logarithm, between bounds narrow and wide', () => {
    const widths = fc.constantFrom(0.001, 0.05, 0.3, 0.9, 2, 7, 30);
    fc.assert(
      fc.property(bounds, widths, etas, taus, (lower, width, eta, tau) => {
        expectSlopes((out, e, t) => intervalTerms(out, lower, lower + width, e, t), eta, tau);
      }),
    );
  });

  it('agree where the closed form takes over from the five points', () => {
    for (const centre of [0, 0.4, 3, 12, -20]) {
      const width = 0.5 / (1 + Math.abs(centre));
      const at = (w: number) =>
        filled((out, e, t) => intervalTerms(out, centre - w / 2, centre + w / 2, e, t), 0, 1);
      const [narrow, wide] = [at(width * (1 - 1e-12)), at(width * (1 + 1e-12))];
      for (const key of Object.keys(narrow) as (keyof RowTerms)[]) {
        expect(Math.abs(narrow[key] - wide[key]), key).toBeLessThan(1e-9 * Math.max(1, Math.abs(wide[key])));
      }
    }
  });

  it('stay numbers where the tail has run out: log P(Z > 40) is -804.608', () => {
    // Feller's asymptotic series of the tail, four terms: -z^2/2 - log(z sqrt(2 pi)) + log(1 - z^-2 + 3 z^-4 - 15 z^-6).
    const { log, byEta } = filled((out, e, t) => oneSidedTerms(out, 40, -1, e, t), 0, 1);
    const series = Math.log1p(-1 / 1600 + 3 / 1600 ** 2 - 15 / 1600 ** 3);
    expect(log).toBeCloseTo(-800 - Math.log(40 * Math.sqrt(2 * Math.PI)) + series, 9);
    expect(byEta).toBeCloseTo(40 + 1 / 40, 3);
    const certain = filled((out, e, t) => oneSidedTerms(out, -60, -1, e, t), 0, 1);
    expect([certain.log, certain.byEta, certain.etaEta]).toEqual([0, 0, 0]);
    const far = filled((out, e, t) => intervalTerms(out, 50, 90, e, t), 0, 1);
    expect(far.log).toBeCloseTo(filled((out, e, t) => oneSidedTerms(out, 50, -1, e, t), 0, 1).log, 9);
  });
});
