import { describe, expect, it } from 'vitest';
import { binomialKernel, poissonKernel } from './kernels.ts';

describe('densities by the saddle-point form', () => {
  it('gives the Poisson masses written out by factorials', () => {
    let mass = Math.exp(-3.7);
    for (let k = 0; k <= 40; k++) {
      expect(poissonKernel(k, 3.7) / mass).toBeCloseTo(1, 12);
      mass *= 3.7 / (k + 1);
    }
  });

  it('gives the binomial masses written out by Pascal’s triangle', () => {
    let choose = 1;
    for (let k = 0; k <= 50; k++) {
      expect(binomialKernel(k, 50, 0.3, 0.7) / (choose * 0.3 ** k * 0.7 ** (50 - k))).toBeCloseTo(1, 12);
      choose *= (50 - k) / (k + 1);
    }
  });

  it('takes arguments that are not whole: Gamma(3/2) = sqrt(pi) / 2 (DLMF 5.4.6)', () => {
    expect(poissonKernel(0.5, 1)).toBeCloseTo(Math.exp(-1) / (Math.sqrt(Math.PI) / 2), 14);
  });

  it('keeps the corners: certain and impossible outcomes', () => {
    expect([poissonKernel(0, 0), poissonKernel(1, 0)]).toEqual([1, 0]);
    expect([binomialKernel(0, 5, 0, 1), binomialKernel(1, 5, 0, 1)]).toEqual([1, 0]);
    expect([binomialKernel(5, 5, 1, 0), binomialKernel(4, 5, 1, 0)]).toEqual([1, 0]);
    expect(binomialKernel(0, 1000, 1e-9, 1 - 1e-9)).toBeCloseTo(Math.exp(-1e-6), 14);
    expect(binomialKernel(1000, 1000, 1 - 1e-9, 1e-9)).toBeCloseTo(Math.exp(-1e-6), 14);
  });
});
