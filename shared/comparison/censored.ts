import type { ComparisonAnswer } from '../contracts/comparison.ts';
import { formatCount } from '../format.ts';
import { censoredMean, clusterIds } from '../stats/index.ts';
import type { CensoredReason } from '../stats/index.ts';
import { clusterKeys } from './fairness.ts';
import type { Fitted } from './fit.ts';
import type { SelectedHeardOnly } from './heard-only-selection.ts';
import type { ComparisonInput } from './input.ts';
import { receiverOnBand } from './offsets.ts';
import type { OffsetColumn } from './offsets.ts';
import type { SelectedUnits } from './selection.ts';
import { decibels } from './wording.ts';

type Censored = NonNullable<ComparisonAnswer['censored']>;
export type CensoredOutcome = { view: Censored; why: null } | { view: null; why: string };

/** A receiver reports hardly anything below this share of its SNRs (2.4, item 5 of the method). */
const limitShare = 0.02;
/** With fewer spots than this the 2nd percentile is the weakest spot or two. */
const fewestSpotsForLimit = 100;

/** `${receiver} ${band}` -> dB. */
type Limits = ReadonlyMap<string, number>;
const limitKey = (receiver: number, band: number) => `${receiver} ${band}`;

/**
 * What a station must exceed to be heard: the 2nd percentile of each receiver's SNRs on each band over the
 * nights asked for, interpolated as R's default (type 7). O(nights x levels).
 */
export function hearingLimits(nights: ComparisonInput['nights']): Limits {
  const levels = new Map<string, Map<number, number>>();
  for (const night of nights) {
    for (const { receiver, band, lowestDb, spots } of night.levels) {
      const key = limitKey(receiver, band);
      const counts = levels.get(key) ?? new Map<number, number>();
      levels.set(key, counts);
      spots.forEach((n, k) => counts.set(lowestDb + k, (counts.get(lowestDb + k) ?? 0) + n));
    }
  }
  const limits = new Map<string, number>();
  for (const [key, counts] of levels) {
    const sorted = [...counts].sort(([a], [b]) => a - b);
    const n = sorted.reduce((sum, [, spots]) => sum + spots, 0);
    if (n >= fewestSpotsForLimit) limits.set(key, quantileOfCounts(sorted, n, limitShare));
  }
  return limits;
}

function quantileOfCounts(sorted: [value: number, count: number][], n: number, share: number): number {
  const at = (n - 1) * share;
  const valueAt = (rank: number) => {
    let passed = 0;
    for (const [value, count] of sorted) {
      passed += count;
      if (rank < passed) return value;
    }
    return sorted.at(-1)![0];
  };
  const [low, high] = [valueAt(Math.floor(at)), valueAt(Math.ceil(at))];
  return low + (at - Math.floor(at)) * (high - low);
}

/**
 * The estimate with the stations that one antenna alone heard: a difference of at least (SNR heard on A) -
 * (limit of the receiver on B), or at most (limit on A) - (SNR heard on B). Receiver offsets are fitted
 * with it; where units of common antennas tell them, those offsets are taken out beforehand instead.
 * Standard errors by (call sign, night).
 */
export function censoredView(
  input: ComparisonInput,
  fitted: Fitted,
  heardOnly: SelectedHeardOnly,
): CensoredOutcome {
  const { selected: units, offsets } = fitted;
  const plainDb = fitted.estimate?.estimateDb ?? null;
  const limits = hearingLimits(input.nights);
  const rows = censoredRows(units, heardOnly, offsets, limits);
  if (fitted.rows.n > units.n) takeOut(rows, fitted.rho);
  if (rows.onlyA + rows.onlyB === 0) {
    return {
      view: null,
      why: 'No station counts as heard on one antenna only (in no block, or in none in which both antennas were listened to alike): there is nothing to add.',
    };
  }
  const fit = censoredMean(
    { lower: rows.lower, upper: rows.upper },
    { clusters: clusterIds(rows.keys).ids, columns: rows.columns },
  );
  if (fit.estimate === null || fit.se === null || fit.interval === null || fit.sd === null) {
    return { view: null, why: reasons[fit.reason ?? 'no-maximum'] };
  }
  const disagrees = plainDb !== null && Math.abs(fit.estimate - plainDb) > input.marginDb;
  const { onlyA, onlyB } = rows;
  return {
    view: {
      estimateDb: fit.estimate,
      seDb: fit.se,
      intervalDb: [fit.interval[0], fit.interval[1]],
      spreadDb: fit.sd,
      both: units.n,
      onlyA,
      onlyB,
      limits: [...limits].map(([key, limitDb]) => {
        const [receiverId, bandMetres] = key.split(' ').map(Number) as [number, number];
        return { receiverId, bandMetres, limitDb };
      }),
      disagrees,
      sentence: censoredSentence(input, { estimateDb: fit.estimate, onlyA, onlyB, plainDb, disagrees }),
    },
    why: null,
  };
}

const reasons: Record<CensoredReason, string> = {
  'one-sided':
    'Stations were heard on one of the antennas only: nothing bounds the difference on the other side.',
  'no-spread': 'The differences have no spread from which a distribution could be fitted.',
  'unbounded-spread': 'The stations heard on one antenna only leave the spread without bound.',
  'no-maximum': 'The stations heard on one antenna only leave the estimate without bound.',
  'cannot-be-separated': 'The antennas cannot be separated from the receivers.',
  'no-cluster-spread': 'The station-nights show no spread from which an interval could be told.',
  'one-cluster': 'One station in one night says nothing about the spread between them.',
};

interface CensoredRows {
  lower: Float64Array;
  upper: Float64Array;
  columns: Float64Array[];
  keys: number[];
  onlyA: number;
  onlyB: number;
}

function censoredRows(
  units: SelectedUnits,
  heardOnly: SelectedHeardOnly,
  offsets: OffsetColumn[],
  limits: Limits,
): CensoredRows {
  const known = knownReceivers(units);
  const usable: number[] = [];
  for (let i = 0; i < heardOnly.n; i++) {
    const silent = heardOnly.side[i]! > 0 ? heardOnly.receiverB[i]! : heardOnly.receiverA[i]!;
    const band = heardOnly.band[i]!;
    const alternating = heardOnly.receiverA[i] === heardOnly.receiverB[i];
    // A receiver that no unit of the band knows has no offset here.
    const linked =
      alternating ||
      (known.has(receiverOnBand(heardOnly.receiverA[i]!, band)) &&
        known.has(receiverOnBand(heardOnly.receiverB[i]!, band)));
    if (linked && limits.has(limitKey(silent, band))) usable.push(i);
  }
  const n = units.n + usable.length;
  const lower = new Float64Array(n);
  const upper = new Float64Array(n);
  lower.set(units.differenceDb);
  upper.set(units.differenceDb);
  const columns = offsets.map(({ values }) => {
    const column = new Float64Array(n);
    column.set(values.subarray(0, units.n));
    return column;
  });
  let onlyA = 0;
  usable.forEach((i, k) => {
    const at = units.n + k;
    const [a, b, band] = [heardOnly.receiverA[i]!, heardOnly.receiverB[i]!, heardOnly.band[i]!];
    const heardOnA = heardOnly.side[i]! > 0;
    if (heardOnA) {
      onlyA++;
      lower[at] = heardOnly.heardDb[i]! - limits.get(limitKey(b, band))!;
      upper[at] = Infinity;
    } else {
      lower[at] = -Infinity;
      upper[at] = limits.get(limitKey(a, band))! - heardOnly.heardDb[i]!;
    }
    if (a === b) return;
    offsets.forEach((offset, c) => {
      if (offset.bandMetres !== band) return;
      if (offset.receiverId === a) columns[c]![at]! += 1;
      if (offset.receiverId === b) columns[c]![at]! -= 1;
    });
  });
  const unitKeys = clusterKeys(units);
  const heardKeys = clusterKeys(heardOnly);
  return {
    ...{ lower, upper, columns, onlyA, onlyB: usable.length - onlyA },
    keys: [...unitKeys, ...usable.map((i) => heardKeys[i]!)],
  };
}

/** Known offsets out of the bounds, and their columns with them. */
function takeOut(rows: CensoredRows, rho: Float64Array): void {
  rows.columns.forEach((column, k) => {
    for (let i = 0; i < column.length; i++) {
      rows.lower[i]! -= column[i]! * rho[k]!;
      rows.upper[i]! -= column[i]! * rho[k]!;
    }
  });
  rows.columns = [];
}

/** Receivers of simultaneous units by band: those whose offsets the regression knows. */
function knownReceivers(units: SelectedUnits): Set<number> {
  const known = new Set<number>();
  for (let i = 0; i < units.n; i++) {
    if (units.alternating[i] === 1) continue;
    known.add(receiverOnBand(units.receiverA[i]!, units.band[i]!));
    known.add(receiverOnBand(units.receiverB[i]!, units.band[i]!));
  }
  return known;
}

interface CensoredWords {
  estimateDb: number;
  plainDb: number | null;
  onlyA: number;
  onlyB: number;
  disagrees: boolean;
}

function censoredSentence(input: ComparisonInput, words: CensoredWords): string {
  const { estimateDb, plainDb, onlyA, onlyB, disagrees } = words;
  const { a, b } = input.antennas;
  const counts =
    `${formatCount(onlyA)} heard on ${a.name} only and ` + `${formatCount(onlyB)} on ${b.name} only`;
  if (plainDb === null) return `With those ${counts}, the difference is ${decibels(estimateDb)}\u2009dB.`;
  if (decibels(plainDb) === decibels(estimateDb)) {
    return `Counting those ${counts} does not move the difference of ${decibels(plainDb)}\u2009dB.`;
  }
  if (!disagrees) {
    return (
      `Counting those ${counts} moves the difference from ${decibels(plainDb)} to ${decibels(estimateDb)}\u2009dB, ` +
      `less than the margin of ${decibels(input.marginDb)}\u2009dB.`
    );
  }
  const further = Math.abs(estimateDb) > Math.abs(plainDb);
  return (
    `Counting those ${counts} moves the difference from ${decibels(plainDb)} to ${decibels(estimateDb)}\u2009dB, ` +
    `more than the margin of ${decibels(input.marginDb)}\u2009dB: ` +
    (further
      ? 'the plain estimate takes only stations that both heard, which pulls it toward zero.'
      : 'the weak stations, which one antenna alone heard, speak against what the strong ones say.')
  );
}
