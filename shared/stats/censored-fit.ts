import { choleskyFactor, choleskyInverse, choleskySolve } from './cholesky.ts';
import { intervalTerms, noTerms, oneSidedTerms, type RowTerms } from './censored-likelihood.ts';

/** Rows on a scale of about one, see censoredMean. An infinite bound means none on that side. */
export interface CensoredRows {
  lower: Float64Array;
  upper: Float64Array;
  /** Independent columns, the first all ones. */
  columns: readonly Float64Array[];
}

export type FitFailure =
  /** The likelihood grows without end as the spread goes to zero. */
  | 'no-spread'
  /** It grows without end as the spread goes to infinity. */
  | 'unbounded-spread'
  /** It grows without end as a coefficient does: nothing holds it on one side. */
  | 'no-maximum';

export interface CensoredFit {
  /** Coefficients over sigma, then 1 / sigma. */
  parameters: Float64Array;
  logLikelihood: number;
  /** Inverse of the observed information of the parameters, row-major. */
  inverse: Float64Array;
  iterations: number;
}

interface Evaluation {
  value: number;
  gradient: Float64Array;
  information: Float64Array;
}

/** Rows with exact values enter the likelihood through their sums of products alone. */
interface Prepared extends CensoredRows {
  exactCount: number;
  /** Sums of products of the columns and, last, the value, over exact rows. */
  products: Float64Array;
  /** Rows that are not exact. */
  censored: Int32Array;
}

const isExact = (rows: CensoredRows, i: number) => rows.lower[i] === rows.upper[i];

function prepare(rows: CensoredRows): Prepared {
  const { lower, columns } = rows;
  const d = columns.length + 1;
  const products = new Float64Array(d * d);
  const censored: number[] = [];
  const own = new Float64Array(d);
  for (let i = 0; i < lower.length; i++) {
    if (!isExact(rows, i)) {
      censored.push(i);
      continue;
    }
    for (let j = 0; j < d - 1; j++) own[j] = columns[j]![i]!;
    own[d - 1] = lower[i]!;
    for (let a = 0; a < d; a++) for (let b = 0; b < d; b++) products[a * d + b]! += own[a]! * own[b]!;
  }
  return {
    ...rows,
    exactCount: lower.length - censored.length,
    products,
    censored: Int32Array.from(censored),
  };
}

function rowTerms(
  terms: RowTerms,
  { lower, upper }: CensoredRows,
  i: number,
  eta: number,
  tau: number,
): void {
  if (lower[i] === -Infinity) oneSidedTerms(terms, upper[i]!, 1, eta, tau);
  else if (upper[i] === Infinity) oneSidedTerms(terms, lower[i]!, -1, eta, tau);
  else intervalTerms(terms, lower[i]!, upper[i]!, eta, tau);
}

function linear(columns: readonly Float64Array[], parameters: Float64Array, i: number): number {
  let eta = 0;
  for (let j = 0; j < columns.length; j++) eta += parameters[j]! * columns[j]![i]!;
  return eta;
}

/** Log-likelihood with gradient and observed information at the parameters. O(n d^2). */
function evaluate(rows: Prepared, parameters: Float64Array): Evaluation {
  const { columns, products, exactCount, censored } = rows;
  const m = columns.length;
  const d = m + 1;
  const tau = parameters[m]!;
  const gradient = new Float64Array(d);
  const information = products.slice();
  // z = tau y - eta is the product of (columns, y) with these, reversed in sign.
  const direction = parameters.slice();
  direction[m] = -tau;
  let squares = 0;
  for (let a = 0; a < d; a++) {
    let along = 0;
    for (let b = 0; b < d; b++) along += products[a * d + b]! * direction[b]!;
    squares += direction[a]! * along;
    gradient[a] = a < m ? -along : along;
  }
  for (let j = 0; j < m; j++) {
    information[j * d + m]! *= -1;
    information[m * d + j]! *= -1;
  }
  let value = -0.5 * squares;
  if (exactCount > 0) {
    value += exactCount * (Math.log(tau) - 0.5 * Math.log(2 * Math.PI));
    gradient[m]! += exactCount / tau;
    information[m * d + m]! += exactCount / (tau * tau);
  }
  const terms = noTerms();
  for (const i of censored) {
    rowTerms(terms, rows, i, linear(columns, parameters, i), tau);
    value += terms.log;
    gradient[m]! += terms.byTau;
    information[m * d + m]! += terms.tauTau;
    for (let a = 0; a < m; a++) {
      const x = columns[a]![i]!;
      if (x === 0) continue;
      gradient[a]! += terms.byEta * x;
      information[a * d + m]! += terms.etaTau * x;
      for (let b = 0; b < m; b++) information[a * d + b]! += terms.etaEta * x * columns[b]![i]!;
    }
  }
  for (let a = 0; a < m; a++) information[m * d + a] = information[a * d + m]!;
  return { value, gradient, information };
}

/** Diagonal of the inverse of the columns' own products: the least variance the coefficients could have. */
function leastVariances(columns: readonly Float64Array[]): Float64Array | null {
  const m = columns.length;
  const gram = new Float64Array(m * m);
  columns.forEach((a, i) =>
    columns.forEach((b, j) => {
      let sum = 0;
      for (let row = 0; row < a.length; row++) sum += a[row]! * b[row]!;
      gram[i * m + j] = sum;
    }),
  );
  const factor = choleskyFactor(gram, m);
  if (!factor) return null;
  const inverse = choleskyInverse(factor, m);
  return Float64Array.from({ length: m }, (_, j) => inverse[j * m + j]!);
}

/**
 * Newton's step; where the information is flat (far from the maximum, or no maximum) a ridge keeps it
 * pointing uphill.
 */
function newtonStep({ gradient, information }: Evaluation): Float64Array {
  const d = gradient.length;
  for (let ridge = 0; ; ridge = ridge === 0 ? 1e-10 : ridge * 100) {
    const lifted = information.slice();
    if (ridge > 0) {
      let most = 0;
      for (let j = 0; j < d; j++) most = Math.max(most, information[j * d + j]!);
      for (let j = 0; j < d; j++) lifted[j * d + j]! += ridge * Math.max(most, 1e-100);
    }
    const factor = choleskyFactor(lifted, d);
    if (factor) return choleskySolve(factor, gradient);
  }
}

/** A spread this many times smaller or larger than the data's own has run away. */
const runaway = 1e6;

/**
 * Maximises the likelihood of censored normal rows by Newton's method with step halving. The function
 * is concave in these parameters (see censored-likelihood.ts), so the maximum, if there is one, is found
 * from any start; if there is none the parameters run away, and the way they go says why.
 *
 * Time O(n d^2) per step, about ten steps; the last step's error is of the order of 1e-12 standard errors.
 */
export function fitCensored(rows: CensoredRows): CensoredFit | FitFailure {
  const prepared = prepare(rows);
  const m = rows.columns.length;
  const d = m + 1;
  let parameters: Float64Array = new Float64Array(d);
  parameters[m] = 1;
  let here = evaluate(prepared, parameters);
  let iterations = 0;
  for (let settled = false; !settled && iterations < 200; iterations++) {
    const step = newtonStep(here);
    let gain = 0;
    for (let j = 0; j < d; j++) gain += step[j]! * here.gradient[j]!;
    // This close the quadratic model holds to the last digit: take the whole step and stop.
    settled = gain < 1e-12;
    // 1 / sigma stays positive.
    let size = step[m]! < 0 ? Math.min(1, (-0.9 * parameters[m]!) / step[m]!) : 1;
    for (let halved = 0; ; halved++) {
      const tried = parameters.map((value, j) => value + size * step[j]!);
      const there = evaluate(prepared, tried);
      if (
        settled ||
        halved === 60 ||
        there.value >= here.value + 1e-4 * size * gain - 1e-13 * Math.abs(here.value)
      ) {
        parameters = tried;
        here = there;
        break;
      }
      size /= 2;
    }
    if (parameters[m]! > runaway) return 'no-spread';
    if (parameters[m]! < 1 / runaway) return 'unbounded-spread';
  }
  const factor = choleskyFactor(here.information, d);
  const least = leastVariances(rows.columns);
  if (!factor || !least) return 'no-maximum';
  const inverse = choleskyInverse(factor, d);
  for (let j = 0; j < m; j++) if (!(inverse[j * d + j]! < runaway * least[j]!)) return 'no-maximum';
  return { parameters, logLikelihood: here.value, inverse, iterations };
}

/**
 * Gradient of the log-likelihood summed over the rows of each cluster, [cluster][parameter] row-major.
 *
 * @param ids cluster of each row, 0 ... size - 1
 */
export function clusterScores(
  rows: CensoredRows,
  parameters: Float64Array,
  ids: Int32Array,
  size: number,
): Float64Array {
  const { lower, columns } = rows;
  const m = columns.length;
  const d = m + 1;
  const tau = parameters[m]!;
  const scores = new Float64Array(size * d);
  const terms = noTerms();
  for (let i = 0; i < lower.length; i++) {
    const eta = linear(columns, parameters, i);
    if (isExact(rows, i)) {
      terms.byEta = tau * lower[i]! - eta;
      terms.byTau = 1 / tau - terms.byEta * lower[i]!;
    } else rowTerms(terms, rows, i, eta, tau);
    const at = ids[i]! * d;
    for (let j = 0; j < m; j++) scores[at + j]! += terms.byEta * columns[j]![i]!;
    scores[at + m]! += terms.byTau;
  }
  return scores;
}
