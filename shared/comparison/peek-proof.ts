import type { ComparisonAnswer } from '../contracts/comparison.ts';
import { nightDate } from '../radio/night.ts';
import { confidenceSequence } from '../stats/index.ts';
import { CELL_MIN_CLUSTERS, CELL_MIN_NIGHTS } from './cells.ts';
import { clusterMeans } from './cluster-means.ts';
import type { SelectedUnits } from './selection.ts';
import { decibels } from './wording.ts';

type PeekProof = NonNullable<ComparisonAnswer['peekProof']>;

/**
 * Station-nights at which the interval is tightest for its kind: a fortnight of an ordinary band. Fixed for all
 * questions: choosing it after seeing the data would undo what the interval promises.
 */
const TUNED_FOR_CLUSTERS = 200;

/**
 * The interval that may be watched (2.4, item 7 of the method): after each night, from the means of the
 * station-nights so far in order of time. It begins where a verdict could: from 8 station-nights of 3 nights.
 * Null with fewer.
 */
export function peekProofLine(
  units: SelectedUnits,
  correctedDb: Float64Array,
  clusters: Int32Array,
  clusterCount: number,
  names: { a: string; b: string },
): PeekProof | null {
  const order = clustersInTime(units, clusters, clusterCount);
  const means = clusterMeans(correctedDb, clusters, clusterCount);
  const { line } = confidenceSequence(
    order.map((cluster) => means[cluster.id]!),
    { tunedFor: TUNED_FOR_CLUSTERS, from: CELL_MIN_CLUSTERS },
  );
  const points: PeekProof['points'] = [];
  let nights = 0;
  order.forEach(({ night }, k) => {
    if (order[k + 1]?.night === night) return;
    nights++;
    const { estimate, interval: own } = line[k]!;
    const interval = nights >= CELL_MIN_NIGHTS ? own : null;
    points.push({
      night: nightDate(night),
      clusters: k + 1,
      estimateDb: estimate,
      intervalDb: interval && [interval[0], interval[1]],
    });
  });
  if (points.every(({ intervalDb }) => intervalDb === null)) return null;
  return { tunedForClusters: TUNED_FOR_CLUSTERS, points, sentence: peekProofSentence(points, names) };
}

interface TimedCluster {
  id: number;
  night: number;
  firstBlock: number;
}

/** By night, then by the block in which the station was first heard on both. */
function clustersInTime(units: SelectedUnits, clusters: Int32Array, clusterCount: number): TimedCluster[] {
  const found: TimedCluster[] = Array.from({ length: clusterCount }, (_, id) => ({
    id,
    night: 0,
    firstBlock: Infinity,
  }));
  for (let i = 0; i < units.n; i++) {
    const cluster = found[clusters[i]!]!;
    cluster.night = units.night[i]!;
    cluster.firstBlock = Math.min(cluster.firstBlock, units.blockMinute[i]!);
  }
  return found.sort((p, q) => p.night - q.night || p.firstBlock - q.firstBlock || p.id - q.id);
}

function peekProofSentence(points: PeekProof['points'], names: { a: string; b: string }): string {
  const last = points.at(-1)!;
  const sideOf = ({ intervalDb }: PeekProof['points'][number]) =>
    intervalDb === null ? 0 : intervalDb[0] > 0 ? 1 : intervalDb[1] < 0 ? -1 : 0;
  const side = sideOf(last);
  if (last.intervalDb === null || side === 0) {
    const once = points.find((point) => sideOf(point) !== 0);
    return once === undefined
      ? 'The peek-proof interval has held zero all along: stopping now settles nothing.'
      : `The peek-proof interval left zero out after the night of ${once.night} and holds it again now: not settled.`;
  }
  let since = points.length - 1;
  while (since > 0 && sideOf(points[since - 1]!) === side) since--;
  const [lo, hi] = side > 0 ? last.intervalDb : [-last.intervalDb[1], -last.intervalDb[0]];
  return (
    `${side > 0 ? names.a : names.b} hears better, and that may be said however often you look: since the night of ` +
    `${points[since]!.night} the peek-proof interval has left zero out (now ${decibels(lo)} to ${decibels(hi)}\u2009dB).`
  );
}
