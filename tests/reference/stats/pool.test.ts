import { describe, expect, it } from 'vitest';
import { pool, type PoolOptions } from '../../../shared/stats/index.ts';
import { Mismatches, readReference } from './compare.ts';

interface Answer {
  tau2: number;
  estimate: number;
  se: number;
  p: number;
  lo: number;
  hi: number;
  q: number;
  qP: number;
  /** Shrunken cells, kept for one interval of each method. */
  cells?: number[];
  cellSe?: number[];
  cellLo?: number[];
  cellHi?: number[];
}
type Kind = 'dl' | 'pm' | 'dlKnapp' | 'pmKnapp';
type Case = { y: number[]; s: number[]; level: number } & Record<Kind, Answer>;

const kinds: [Kind, PoolOptions][] = [
  ['dl', { method: 'dersimonian-laird' }],
  ['pm', { method: 'paule-mandel' }],
  ['dlKnapp', { method: 'dersimonian-laird', interval: 'hartung-knapp' }],
  ['pmKnapp', { method: 'paule-mandel', interval: 'hartung-knapp' }],
];
const cases = readReference<Case>('pool');

describe('pool against R 4.2.2 metafor::rma and blup', () => {
  it.each(kinds)(
    '%s equals tau^2, mean, interval, Q and shrunken cells on 220 seeded maps',
    (kind, options) => {
      const off = new Mismatches();
      cases.forEach(({ y, s, level, ...expected }, i) => {
        const result = pool(y, s, { ...options, level });
        const r = expected[kind];
        const size = Math.max(...y.map(Math.abs));
        const near = (name: string, actual: number | null, value: number) =>
          off.check(`case ${i} ${name}`, actual, value, 1e-8, 1e-11 * size);
        near('tau2', result.tau2, r.tau2);
        near('estimate', result.estimate, r.estimate);
        near('se', result.se, r.se);
        near('p', result.p, r.p);
        near('low', result.interval![0], r.lo);
        near('high', result.interval![1], r.hi);
        near('Q', result.q, r.q);
        near('p of Q', result.qP, r.qP);
        near('I^2', result.iSquared, Math.max(0, (r.q - (y.length - 1)) / r.q));
        if (!r.cells) return;
        result.cells!.forEach((cell, j) => {
          near(`cell ${j}`, cell.estimate, r.cells![j]!);
          near(`cell ${j} se`, cell.se, r.cellSe![j]!);
          near(`cell ${j} low`, cell.interval[0], r.cellLo![j]!);
          near(`cell ${j} high`, cell.interval[1], r.cellHi![j]!);
        });
      });
      expect(off.found).toEqual([]);
      expect(off.compared).toBeGreaterThan(1700);
    },
  );
});
