import { type Numbers, requireOpenUnit, requireUnit } from './arguments.ts';

export interface BenjaminiHochbergOptions {
  /** Accepted false discovery rate; 0.05 unless changed. */
  q?: number;
}

export interface BenjaminiHochbergResult {
  /** Adjusted p, in the order given. */
  adjusted: number[];
  /** Whether each is rejected at q, in the order given. */
  rejected: boolean[];
  rejectedCount: number;
}

/**
 * Benjamini and Hochberg's step-up control of the false discovery rate.
 *
 * With p sorted, adjusted p_(i) = min over j >= i of p_(j) m / j, at most 1; rejected when it is at most q.
 * Source: Benjamini and Hochberg (1995), J. R. Statist. Soc. B 57, 289-300. Equals R p.adjust(p, "BH").
 * O(m log m). An empty list gives empty lists.
 *
 * @param p the p of the cells of one map, each in [0, 1]
 * @throws RangeError naming `p` or `q`
 * @example benjaminiHochberg([0.01, 0.04, 0.03]).adjusted // [0.03, 0.04, 0.04]
 */
export function benjaminiHochberg(
  p: Numbers,
  options: BenjaminiHochbergOptions = {},
): BenjaminiHochbergResult {
  const q = options.q ?? 0.05;
  requireOpenUnit('q', q);
  for (let i = 0; i < p.length; i++) requireUnit(`p[${i}]`, p[i]!);
  const m = p.length;
  const order = Array.from({ length: m }, (_, i) => i).sort((i, j) => p[j]! - p[i]!);
  const adjusted = new Array<number>(m).fill(1);
  let smallest = 1;
  order.forEach((index, fromTop) => {
    smallest = Math.min(smallest, (p[index]! * m) / (m - fromTop));
    adjusted[index] = smallest;
  });
  const rejected = adjusted.map((value) => value <= q);
  return { adjusted, rejected, rejectedCount: rejected.filter(Boolean).length };
}
