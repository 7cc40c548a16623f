import { benjaminiHochberg } from './benjamini-hochberg.ts';
import type { LadderEstimate } from './ladder-fit.ts';
import type { LadderData } from './ladder-rows.ts';
import type { LadderScale } from './ladder-rungs.ts';
import { type LadderSplit, type SplitPair, type SplitQuestion, splitPairs } from './ladder-split.ts';

/** Two antennas of one group, a the lower id; differences are a minus b, dB. */
export interface LadderPair extends LadderEstimate, LadderSplit {
  a: number;
  b: number;
  group: number;
  /** Benjamini-Hochberg over all pairs of the result. */
  pAdjusted: number | null;
  /** Rows and clusters of exactly these two antennas. */
  rows: number;
  clusters: number;
  /** Share of its rows in the leverage of all rows: how much of the ladder hangs on them. */
  weightShare: number;
  /** The p of `inconsistency`, Benjamini-Hochberg over all pairs that have one. */
  consistencyPAdjusted: number | null;
}

export interface LadderSupport {
  column: { rows: Int32Array; clusters: Int32Array };
  pair: { rows: Int32Array; clusters: Int32Array };
}

/** Rows and clusters by antenna, receiver and pair of antennas (a * antennas + b). */
export function countSupport(data: LadderData, k: number): LadderSupport {
  const { contacts, columns, rows, clusters, starts, entryContact } = data;
  const p = data.antennaIds.length;
  const column = { rows: new Int32Array(k), clusters: new Int32Array(k) };
  const pair = { rows: new Int32Array(p * p), clusters: new Int32Array(p * p) };
  const pairOf = (t: number) => (columns[4 * t]! < 0 ? -1 : columns[4 * t]! * p + columns[4 * t + 1]!);
  for (let t = 0; t < contacts; t++) {
    for (let at = 4 * t; at < 4 * t + 4; at++) if (columns[at]! >= 0) column.rows[columns[at]!]! += rows[t]!;
    if (pairOf(t) >= 0) pair.rows[pairOf(t)]! += rows[t]!;
  }
  const lastOfColumn = new Int32Array(k).fill(-1);
  const lastOfPair = new Int32Array(p * p).fill(-1);
  for (let g = 0; g < clusters; g++) {
    for (let entry = starts[g]!; entry < starts[g + 1]!; entry++) {
      const t = entryContact[entry]!;
      for (let at = 4 * t; at < 4 * t + 4; at++) {
        const j = columns[at]!;
        if (j < 0 || lastOfColumn[j] === g) continue;
        lastOfColumn[j] = g;
        column.clusters[j]! += 1;
      }
      const own = pairOf(t);
      if (own < 0 || lastOfPair[own] === g) continue;
      lastOfPair[own] = g;
      pair.clusters[own]! += 1;
    }
  }
  return { column, pair };
}

/** p adjusted over those that have one, in their places. */
function adjust(values: readonly (number | null)[]): (number | null)[] {
  const { adjusted } = benjaminiHochberg(values.filter((p) => p !== null));
  let next = 0;
  return values.map((p) => (p === null ? null : adjusted[next++]!));
}

/** Every pair inside a group, with its direct and indirect parts. */
export function allPairs(
  groups: readonly number[][],
  question: SplitQuestion,
  { fit, solid, idOf }: LadderScale,
  support: LadderSupport,
): LadderPair[] {
  const { data } = question;
  const p = data.antennaIds.length;
  const contactsOf = new Map<number, number[]>();
  for (let t = 0; t < data.contacts; t++) {
    const key = data.antennas[2 * t]! * p + data.antennas[2 * t + 1]!;
    contactsOf.set(key, [...(contactsOf.get(key) ?? []), t]);
  }
  const asked = groups.flatMap((group, index) => {
    const columns = [...group].sort((x, y) => x - y);
    return columns.flatMap((a, at) =>
      columns.slice(at + 1).map((b): SplitPair & { group: number } => {
        const axis = fit.axis[a]!.map((value, c) => value - fit.axis[b]![c]!);
        const whole = fit.estimate(axis, solid(a, b));
        return { a, b, group: index, whole, direct: contactsOf.get(a * p + b) ?? [] };
      }),
    );
  });
  const splits = splitPairs(question, asked);
  const pairs = asked.map(({ a, b, group, whole, direct }, i) => ({
    ...{ a: idOf(a), b: idOf(b), group, ...whole },
    rows: support.pair.rows[a * p + b]!,
    clusters: support.pair.clusters[a * p + b]!,
    weightShare: direct.reduce((sum, t) => sum + fit.leverage[t]!, 0) / fit.rank,
    ...splits[i]!,
  }));
  const adjusted = adjust(pairs.map((pair) => pair.p));
  const consistency = adjust(pairs.map((pair) => pair.inconsistency?.p ?? null));
  return pairs.map((pair, i) => ({
    ...pair,
    pAdjusted: adjusted[i]!,
    consistencyPAdjusted: consistency[i]!,
  }));
}
