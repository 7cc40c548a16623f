import { requireCount } from './arguments.ts';

/**
 * Orders in which treatments follow each other equally often, for switching plans: what an antenna leaves
 * behind for its successor (or the time of night) then weighs on all alike.
 *
 * Even n: n orders, developed cyclically from 0, 1, n - 1, 2, n - 2, ...; every treatment comes once in every
 * place, and every ordered pair of neighbours exactly once. Odd n: the mirrored orders are added, 2 n in all,
 * and every pair comes twice. Source: Williams (1949), Aust. J. Sci. Res. A 2. O(n^2).
 *
 * @param n treatments, at least 2
 * @returns orders of the treatments 0 ... n - 1
 * @throws RangeError naming `n`
 * @example williamsSquare(4) // [[0, 1, 3, 2], [1, 2, 0, 3], [2, 3, 1, 0], [3, 0, 2, 1]]
 */
export function williamsSquare(n: number): number[][] {
  requireCount('n', n);
  if (n < 2) throw new RangeError(`n must be at least 2, got ${n}`);
  const initial = Array.from({ length: n }, (_, place) =>
    place % 2 === 1 ? (place + 1) / 2 : (n - place / 2) % n,
  );
  const orders = initial.map((_, step) => initial.map((treatment) => (treatment + step) % n));
  return n % 2 === 0 ? orders : [...orders, ...orders.map((order) => [...order].reverse())];
}
