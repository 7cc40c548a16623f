import { requireFinite, requirePositive } from '../arguments.ts';
import { poissonKernel } from './kernels.ts';
import { normalHazard, normalUpper } from './normal.ts';
import { solveIncreasing } from './solve.ts';

/** P(T > t) for side -1, P(T <= t) for side 1, where T = (Z + delta) / X, X^2 chi-squared over df; t >= 0. */
function beside(t: number, df: number, delta: number, side: 1 | -1): number {
  // With u = log X the tail is the integral of density(u) * P(side (Z + delta - t X) <= 0). The log of the
  // integrand is concave in X, so it has one peak; the trapezoidal rule on all of u converges exponentially.
  const atU = (u: number) => {
    const x = Math.exp(u);
    const away = side * (delta - t * x);
    return df * poissonKernel(df / 2, (df / 2) * x * x) * normalUpper(away);
  };
  // The hazard is at most |delta| + 1 beyond t X: these bracket the peak.
  const push = (t * (Math.abs(delta) + 1)) / df;
  let curvature = 1;
  const peak = solveIncreasing(
    (u) => {
      const x = Math.exp(u);
      const away = side * (delta - t * x);
      const hazard = normalHazard(away);
      const pull = side * t * x * hazard;
      curvature = 2 * df * x * x - pull + t * t * x * x * hazard * (hazard - away);
      return [df * (x * x - 1) - pull, curvature];
    },
    -Math.log(2 * (1 + push + t / Math.sqrt(df))),
    Math.log(1 + push),
    0,
  );
  // Fine enough for the density (poles at pi / 4 from the axis), the peak, and the edge at t X = delta.
  const step = Math.min(0.12, 0.5 / Math.sqrt(Math.abs(curvature)), 0.6 / (1 + Math.abs(delta)));
  let sum = atU(peak);
  for (const direction of [-1, 1]) {
    for (let j = 1; ; j++) {
      const term = atU(peak + direction * j * step);
      sum += term;
      if (!(term > 1e-19 * sum)) break;
    }
  }
  return Math.min(1, step * sum);
}

function requireArguments(t: number, df: number, delta: number): void {
  requireFinite('t', t);
  requirePositive('df', df);
  requireFinite('delta', delta);
}

/**
 * P(T > t) for Student's t with df degrees of freedom and noncentrality delta, the tail itself.
 *
 * T = (Z + delta) / sqrt(V / df), Z standard normal, V chi-squared. Integrated numerically over V (the
 * defining integral, Johnson, Kotz and Balakrishnan, Continuous univariate distributions 2, ch. 31), to about
 * 1e-12 relative in both tails, where the series of Lenth (1989), AS 243, loses small upper tails. Time grows with
 * 1 + |delta|; some hundred terms for delta below 10.
 *
 * @throws RangeError naming `t`, `df` or `delta`
 * @example noncentralTUpper(2.262, 9, 3) // 0.7612
 */
export function noncentralTUpper(t: number, df: number, delta: number): number {
  requireArguments(t, df, delta);
  return t >= 0 ? beside(t, df, delta, -1) : beside(-t, df, -delta, 1);
}

/** P(T <= t), the lower tail itself. */
export function noncentralTCdf(t: number, df: number, delta: number): number {
  requireArguments(t, df, delta);
  return t >= 0 ? beside(t, df, delta, 1) : beside(-t, df, -delta, -1);
}
