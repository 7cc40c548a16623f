import type { Interval } from './intervals.ts';
import { type SweptGram, tells, toldGroups } from './ladder-design.ts';
import { chancesOfBest } from './ladder-draws.ts';
import type { LadderFit, LadderGap } from './ladder-fit.ts';
import type { LadderSupport } from './ladder-pairs.ts';
import type { Random } from './random.ts';

/** Why a value, or its standard error, is missing. */
export type LadderReason =
  | LadderGap
  /** The only one of its group: nothing to measure it against. */
  | 'alone'
  /** It is the reference itself. */
  | 'reference';

/** An antenna, or a receiver, on the scale of its group. */
export interface LadderRung {
  id: number;
  /** Index of its group. */
  group: number;
  /** dB against the group's mean or reference; null when alone. */
  value: number | null;
  se: number | null;
  interval: Interval | null;
  /** 1: highest of its group; equal values share the better rank. */
  rank: number | null;
  /** Null where one cluster carries its link; the others of the group add up to 1. Receivers have none. */
  chanceBest: number | null;
  /** Rows, and clusters, in which it takes part (a receiver: against another receiver). */
  rows: number;
  clusters: number;
  reason: LadderReason | null;
}

export interface LadderScale {
  fit: LadderFit;
  /** Whether the difference of two columns stays known whichever cluster is taken away. */
  solid: (i: number, j: number) => boolean;
  /** Column of the reference; -1: the mean. */
  reference: number;
  /** Values closer than this are equal, dB. */
  tie: number;
  idOf: (column: number) => number;
}

/**
 * Values of one group against its mean or reference. The mean is taken over the core, the part of more than
 * half of the group that no single cluster holds together: a newcomer heard in one station-night must not
 * move the rest. Without a core it is the mean of all, and nothing has an error against it.
 */
function rungsOfGroup(columns: number[], { fit, solid, reference, tie }: LadderScale) {
  const parts = toldGroups(0, columns.length, (x, y) => solid(columns[x]!, columns[y]!));
  const core = (parts.find((part) => 2 * part.length > columns.length) ?? []).map((x) => columns[x]!);
  const counted = core.length > 0 ? core : columns;
  const against = columns.includes(reference) ? [reference] : counted;
  const origin = new Float64Array(fit.rank);
  for (const j of against) fit.axis[j]!.forEach((value, c) => (origin[c]! += value / against.length));
  const anchor = against[0]!;
  const rungs = columns.map((column) => {
    const axis = fit.axis[column]!.map((value, c) => value - origin[c]!);
    const held = solid(column, anchor) && (anchor === reference || core.length > 0);
    return { column, axis, held, inCore: core.includes(column), ...fit.estimate(axis, held) };
  });
  const rankOf = (estimate: number) => 1 + rungs.filter((other) => other.estimate > estimate + tie).length;
  return rungs.map((rung) => ({ ...rung, rank: rankOf(rung.estimate) }));
}

/** Shares of draws in which each antenna of the part that no single cluster carries is the highest. */
function drawBest(
  rungs: ReturnType<typeof rungsOfGroup>,
  fit: LadderFit,
  draws: number,
  random: Random,
): Map<number, number> {
  const drawn = rungs.filter(({ inCore }) => inCore);
  if (fit.gap || drawn.length < 2) return new Map();
  // Differences from the first: the same for every origin of the scale.
  const axes = drawn.map(({ axis }) => axis.map((value, c) => value - drawn[0]!.axis[c]!));
  const covariance = Float64Array.from(axes.flatMap((x) => axes.map((y) => fit.covariance(x, y))));
  const chances = chancesOfBest(
    drawn.map(({ estimate }) => estimate),
    covariance,
    draws,
    random,
  );
  return new Map(drawn.map(({ column }, i) => [column, chances[i]!]));
}

const mostRows = (rows: Int32Array) => (a: number[], b: number[]) =>
  Math.max(...b.map((j) => rows[j]!)) - Math.max(...a.map((j) => rows[j]!)) || a[0]! - b[0]!;

/** Columns `from` to `to` (excluded) in groups, each group as a scale of its own. */
export function standings(
  [from, to]: readonly [number, number],
  swept: SweptGram,
  scale: LadderScale,
  support: LadderSupport,
  best: { draws: number; random: Random } | null,
): { groups: number[][]; rungs: LadderRung[] } {
  const groups = toldGroups(from, to, (i, j) => tells(swept, i, j)).sort(mostRows(support.column.rows));
  const rungs: LadderRung[] = [];
  const ordered = groups.map((group, index) => {
    const made = rungsOfGroup(group, scale).sort((x, y) => x.rank - y.rank || x.column - y.column);
    const chances = best
      ? drawBest(made, scale.fit, best.draws, best.random.fork(index))
      : new Map<number, number>();
    const alone = group.length === 1;
    for (const { column, estimate, se, interval, rank, held } of made) {
      const isReference = column === scale.reference;
      const gap = scale.fit.gap ?? (held ? 'no-spread' : 'one-cluster');
      rungs.push({
        id: scale.idOf(column),
        group: index,
        value: alone ? null : isReference ? 0 : estimate,
        ...{ se, interval, rank: alone ? null : rank },
        chanceBest: chances.get(column) ?? null,
        rows: support.column.rows[column]!,
        clusters: support.column.clusters[column]!,
        reason: alone ? 'alone' : isReference ? 'reference' : se === null ? gap : null,
      });
    }
    return made.map(({ column }) => column);
  });
  return { groups: ordered, rungs: rungs.sort((x, y) => x.id - y.id) };
}
