/** The value of a continued fraction was not reached: arguments far outside anything a comparison makes. */
const maxTerms = 1_000_000;
const tiny = 1e-300;

/**
 * b0 + a1 / (b1 + a2 / (b2 + ...)) by the modified Lentz method (Thompson and Barnett 1986).
 *
 * @param first b0, not zero
 * @param term a_i and b_i for i = 1, 2, ...
 * @throws RangeError when a million terms do not settle it
 */
export function continuedFraction(
  first: number,
  term: (i: number) => readonly [a: number, b: number],
): number {
  let value = first;
  let c = first;
  let d = 0;
  for (let i = 1; i <= maxTerms; i++) {
    const [a, b] = term(i);
    d = b + a * d;
    c = b + a / c;
    if (d === 0) d = tiny;
    if (c === 0) c = tiny;
    d = 1 / d;
    const ratio = c * d;
    value *= ratio;
    if (Math.abs(ratio - 1) < 2e-16) return value;
  }
  throw new RangeError('the arguments of this distribution are too large to evaluate');
}
