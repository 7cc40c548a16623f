import { normalCdf, normalDensity, normalHazard } from './distributions/normal.ts';

/**
 * What one censored row adds to the likelihood: the log of its probability with first derivatives, and
 * minus the second ones, by eta and tau. A normal value y with mean beta'x and deviation sigma is written
 * as z = tau y - eta, tau = 1 / sigma, eta = tau beta'x (Olsen 1978, Econometrica 46): in these terms the
 * log-likelihood is concave, so that Newton's method finds its one maximum from anywhere.
 */
export interface RowTerms {
  log: number;
  byEta: number;
  byTau: number;
  etaEta: number;
  etaTau: number;
  tauTau: number;
}

export const noTerms = (): RowTerms => ({ log: 0, byEta: 0, byTau: 0, etaEta: 0, etaTau: 0, tauTau: 0 });

const halfLogTwoPi = 0.5 * Math.log(2 * Math.PI);

/** A value known to lie on one side of `bound`: side 1 below it (left-censored), -1 above it. */
export function oneSidedTerms(out: RowTerms, bound: number, side: 1 | -1, eta: number, tau: number): void {
  // The row's probability is P(Z > away).
  const away = -side * (tau * bound - eta);
  const hazard = normalHazard(away);
  // Between 0 and 1; far out the difference loses its digits, never its bounds.
  const weight = Math.min(1, Math.max(0, hazard * (hazard - away)));
  // The tail is density over hazard; below -38 the density has run out and the tail is all there is.
  out.log = hazard > 0 ? -0.5 * away * away - halfLogTwoPi - Math.log(hazard) : 0;
  out.byEta = -side * hazard;
  out.byTau = side * hazard * bound;
  out.etaEta = weight;
  out.etaTau = -weight * bound;
  out.tauTau = weight * bound * bound;
}

/** Nodes and weights of the five-point Gauss-Legendre rule on (-1, 1); DLMF table 3.5.2. */
const nodes = [-0.906179845938664, -0.538469310105683, 0, 0.538469310105683, 0.906179845938664];
const nodeWeights = [
  0.236926885056189, 0.478628670499366, 0.568888888888889, 0.478628670499366, 0.236926885056189,
];

/** Where the density hardly changes within the interval, closed forms cancel; five points are exact. */
function narrowTerms(out: RowTerms, lower: number, upper: number, eta: number, tau: number): void {
  const middle = lower + (upper - lower) / 2;
  const half = (upper - lower) / 2;
  const zMiddle = tau * middle - eta;
  let total = 0;
  let [z1, z2, zy1, zy2, zzy, y1, y2] = [0, 0, 0, 0, 0, 0, 0];
  nodes.forEach((node, i) => {
    const y = middle + half * node;
    const z = tau * y - eta;
    const share = nodeWeights[i]! * Math.exp(-0.5 * (z - zMiddle) * (z + zMiddle));
    total += share;
    z1 += share * z;
    z2 += share * z * z;
    zy1 += share * z * y;
    zy2 += share * (z * y) ** 2;
    zzy += share * z * z * y;
    y1 += share * y;
    y2 += share * y * y;
  });
  const [meanZ, meanZy] = [z1 / total, zy1 / total];
  out.log = Math.log((tau * half * total) / Math.sqrt(2 * Math.PI)) - 0.5 * zMiddle * zMiddle;
  out.byEta = meanZ;
  out.byTau = 1 / tau - meanZy;
  out.etaEta = 1 - (z2 / total - meanZ * meanZ);
  out.etaTau = -(y1 / total - (zzy / total - meanZ * meanZy));
  out.tauTau = 1 / (tau * tau) + y2 / total - (zy2 / total - meanZy * meanZy);
}

/** A value known to lie between two finite bounds. */
export function intervalTerms(out: RowTerms, lower: number, upper: number, eta: number, tau: number): void {
  const a = tau * lower - eta;
  const b = tau * upper - eta;
  if ((b - a) * (1 + Math.abs(a + b) / 2) < 0.5) {
    narrowTerms(out, lower, upper, eta, tau);
    return;
  }
  // The interval's probability, and the densities at its ends over it; beside the centre all are first
  // divided by the density at the nearer end, which may have run out.
  let atLower: number;
  let atUpper: number;
  if (a > 0 || b < 0) {
    const [near, far] = a > 0 ? [a, b] : [-b, -a];
    const fall = Math.exp(-0.5 * (far - near) * (far + near));
    const mills = 1 / normalHazard(near) - fall / normalHazard(far);
    out.log = Math.log(mills / Math.sqrt(2 * Math.PI)) - 0.5 * near * near;
    [atLower, atUpper] = a > 0 ? [1 / mills, fall / mills] : [fall / mills, 1 / mills];
  } else {
    const probability = normalCdf(b) - normalCdf(a);
    out.log = Math.log(probability);
    atLower = normalDensity(a) / probability;
    atUpper = normalDensity(b) / probability;
  }
  const step = atUpper - atLower;
  const moment = atUpper * upper - atLower * lower;
  out.byEta = -step;
  out.byTau = moment;
  out.etaEta = b * atUpper - a * atLower + step * step;
  out.etaTau = -(b * upper * atUpper - a * lower * atLower + step * moment);
  out.tauTau = b * upper * upper * atUpper - a * lower * lower * atLower + moment * moment;
}
