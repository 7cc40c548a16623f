/**
 * The two densities every tail in this folder is built on, computed without forming factorials, so
 * that they keep about 14 digits for tiny and for huge arguments alike.
 *
 * Source: Loader (2000), Fast and accurate computation of binomial probabilities (the saddle-point
 * form); Stirling's series, DLMF 5.11.1.
 */

/** log(1 + u) - u without the cancellation near zero, for u > -1. */
function logOnePlusMinus(u: number): number {
  if (Math.abs(u) > 0.4) return Math.log1p(u) - u;
  // log(1 + u) = 2 artanh(v) with v = u / (2 + u), and 2 v - u = -u v.
  const v = u / (2 + u);
  const square = v * v;
  let term = 2 * v * square;
  let sum = 0;
  for (let odd = 3; ; odd += 2) {
    const next = sum + term / odd;
    if (next === sum) return sum - u * v;
    sum = next;
    term *= square;
  }
}

/** Deviance part x log(x / mean) + mean - x, for x > 0 and mean > 0. */
function deviance(x: number, mean: number): number {
  const u = (mean - x) / x;
  // Far out u is huge or next to -1: the plain form has nothing to cancel there.
  return u > -0.5 && u < 1e8 ? -x * logOnePlusMinus(u) : x * (Math.log(x) - Math.log(mean)) + mean - x;
}

/** log Gamma(n + 1) minus Stirling's (n + 1/2) log n - n + log(2 pi) / 2, for n > 0. */
function stirlingError(n: number): number {
  let shifted = n;
  let sum = 0;
  // Recurrence up to where six terms of the series are exact to the last digit.
  while (shifted < 16) {
    sum += (shifted + 0.5) * Math.log1p(1 / shifted) - 1;
    shifted += 1;
  }
  const s = 1 / (shifted * shifted);
  const series =
    1 / 12 - s * (1 / 360 - s * (1 / 1260 - s * (1 / 1680 - s * (1 / 1188 - (s * 691) / 360360))));
  return sum + series / shifted;
}

/** mean^x e^-mean / Gamma(x + 1) for x >= 0 (need not be whole), mean >= 0. */
export function poissonKernel(x: number, mean: number): number {
  if (mean === 0) return x === 0 ? 1 : 0;
  if (x === 0) return Math.exp(-mean);
  return Math.exp(-stirlingError(x) - deviance(x, mean)) / Math.sqrt(2 * Math.PI * x);
}

/**
 * p^x q^(n - x) Gamma(n + 1) / (Gamma(x + 1) Gamma(n - x + 1)) for 0 <= x <= n (need not be whole).
 * q = 1 - p is passed beside p because one of the two is usually known without cancellation.
 */
export function binomialKernel(x: number, n: number, p: number, q: number): number {
  if (p === 0) return x === 0 ? 1 : 0;
  if (q === 0) return x === n ? 1 : 0;
  if (x === 0) return Math.exp(n * (p < q ? Math.log1p(-p) : Math.log(q)));
  if (x === n) return Math.exp(n * (q < p ? Math.log1p(-q) : Math.log(p)));
  const rest = n - x;
  const exponent =
    stirlingError(n) - stirlingError(x) - stirlingError(rest) - deviance(x, n * p) - deviance(rest, n * q);
  return Math.exp(exponent) * Math.sqrt(n / (2 * Math.PI * x * rest));
}
