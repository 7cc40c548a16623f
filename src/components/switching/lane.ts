import type { Dwell } from '../../../shared/contracts/dwell.ts';
import { placeOf, spanOf } from './time-scale.ts';
import type { TimeRange } from './time-scale.ts';

/** What lies where on one receiver's row of the time line. */
interface Stretch {
  fromMs: number;
  toMs: number;
  /** Drawn extent, px, within the picture. */
  leftPx: number;
  rightPx: number;
}
export interface LaneDwell extends Stretch {
  kind: 'dwell';
  dwell: Dwell;
  /** Drawn width of the guard at its start, px; 0 where the start is out of sight. */
  guardPx: number;
}
export interface LaneGap extends Stretch {
  kind: 'gap';
  /** The gap lasts until now: nothing has been logged since. */
  isOpen: boolean;
}
/** Dwells and gaps too narrow to be told apart, together. */
export interface LaneBundle extends Stretch {
  kind: 'bundle';
  dwellCount: number;
  gapCount: number;
  /** Share of the stretch by antenna, largest first; what is missing to 1 is gap. */
  shares: { antennaId: number; share: number }[];
}
export type LaneItem = LaneDwell | LaneGap | LaneBundle;

/** A dwell with its times read: the text is read once, not at each step of a drag. `endMs` null: still on. */
export interface TimedDwell {
  dwell: Dwell;
  startMs: number;
  endMs: number | null;
}

export function timed(dwell: Dwell): TimedDwell {
  const endMs = dwell.endsAt === null ? null : Date.parse(dwell.endsAt);
  return { dwell, startMs: Date.parse(dwell.startsAt), endMs };
}

/** Narrower than this, neighbours are drawn together. */
export const narrowPx = 6;
/**
 * Bundles are cut at steps of this width, so that a night of short dwells still shows how it went along. The steps are
 * counted on the clock, not from the edge: bundles must not shimmer while the line is moved.
 */
const bundlePx = 28;

/**
 * Lays out the dwells of one receiver (sorted by start, never overlapping) over a range. Time before `nowMs` that no
 * dwell covers is a gap; time after it is open. Draws at most about one item each `narrowPx` pixels, however many
 * dwells there are.
 */
export function layOutLane(
  dwells: readonly TimedDwell[],
  range: TimeRange,
  widthPx: number,
  nowMs: number,
  guardSeconds: number,
): LaneItem[] {
  const pieces = cutPieces(dwells, range, nowMs).map((piece) => {
    const leftPx = placeOf(piece.fromMs, range, widthPx);
    const rightPx = placeOf(piece.toMs, range, widthPx);
    return piece.kind === 'gap'
      ? { ...piece, leftPx, rightPx }
      : { ...piece, leftPx, rightPx, guardPx: guardWidth(piece, range, widthPx, guardSeconds) };
  });
  return bundleNarrow(pieces, (bundlePx / Math.max(1, widthPx)) * spanOf(range));
}

type Piece =
  | { kind: 'dwell'; dwell: Dwell; fromMs: number; toMs: number }
  | { kind: 'gap'; isOpen: boolean; fromMs: number; toMs: number };

function cutPieces(dwells: readonly TimedDwell[], range: TimeRange, nowMs: number): Piece[] {
  const pieces: Piece[] = [];
  const gapUntil = (fromMs: number, toMs: number, isOpen: boolean) => {
    const endMs = Math.min(toMs, nowMs, range.toMs);
    if (endMs > fromMs) pieces.push({ kind: 'gap', isOpen, fromMs, toMs: endMs });
  };
  let reachedMs = range.fromMs;
  for (let i = firstReaching(dwells, range.fromMs); i < dwells.length; i++) {
    const { dwell, startMs } = dwells[i]!;
    if (startMs >= range.toMs) break;
    // A dwell without an end lasts until now, or, when it starts ahead of this clock, a moment.
    const endMs = dwells[i]!.endMs ?? Math.max(nowMs, startMs + 1000);
    if (endMs <= range.fromMs) continue;
    gapUntil(reachedMs, startMs, false);
    const fromMs = Math.max(startMs, range.fromMs);
    reachedMs = Math.min(endMs, range.toMs);
    pieces.push({ kind: 'dwell', dwell, fromMs, toMs: reachedMs });
  }
  gapUntil(reachedMs, Infinity, range.toMs >= nowMs);
  return pieces;
}

/** Index of the first dwell that may reach beyond a time: sorted and never overlapping, their ends ascend too. */
function firstReaching(dwells: readonly TimedDwell[], timeMs: number): number {
  let low = 0;
  let high = dwells.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if ((dwells[middle]!.endMs ?? Infinity) <= timeMs) low = middle + 1;
    else high = middle;
  }
  return low;
}

/**
 * Width of the hatched edge: the guard's true width, at least 3 px where the bar has room to spare, and never more
 * than the bar.
 */
export function guardWidth(
  piece: { dwell: Pick<Dwell, 'startsAt'>; fromMs: number; toMs: number },
  range: TimeRange,
  widthPx: number,
  guardSeconds: number,
): number {
  const startMs = Date.parse(piece.dwell.startsAt);
  const leftPx = placeOf(piece.fromMs, range, widthPx);
  const barPx = placeOf(piece.toMs, range, widthPx) - leftPx;
  const guardEndPx = placeOf(startMs + guardSeconds * 1000, range, widthPx);
  const truePx = Math.max(0, guardEndPx - leftPx);
  if (truePx === 0) return 0;
  const shownPx = piece.fromMs === startMs && barPx >= 24 ? Math.max(3, truePx) : truePx;
  return Math.min(barPx, shownPx);
}

function bundleNarrow(pieces: readonly (LaneDwell | LaneGap)[], stepMs: number): LaneItem[] {
  const stepOf = ({ fromMs }: Stretch) => Math.floor(fromMs / stepMs);
  const items: LaneItem[] = [];
  let run: (LaneDwell | LaneGap)[] = [];
  const close = () => {
    if (run.length === 1) items.push(run[0]!);
    else if (run.length > 1) items.push(bundleOf(run));
    run = [];
  };
  for (const piece of pieces) {
    if (piece.rightPx - piece.leftPx >= narrowPx) {
      close();
      items.push(piece);
      continue;
    }
    if (run.length > 0 && stepOf(piece) !== stepOf(run[0]!)) close();
    // The future between two planned dwells is no piece: what lies apart is not drawn as one.
    if (run.length > 0 && piece.fromMs > run.at(-1)!.toMs) close();
    run.push(piece);
  }
  close();
  return items;
}

function bundleOf(run: readonly (LaneDwell | LaneGap)[]): LaneBundle {
  const [first, last] = [run[0]!, run.at(-1)!];
  const spanMs = last.toMs - first.fromMs;
  const byAntenna = new Map<number, number>();
  let dwellCount = 0;
  for (const piece of run) {
    if (piece.kind === 'gap') continue;
    dwellCount += 1;
    const { antennaId } = piece.dwell;
    byAntenna.set(antennaId, (byAntenna.get(antennaId) ?? 0) + (piece.toMs - piece.fromMs) / spanMs);
  }
  return {
    kind: 'bundle',
    ...{ fromMs: first.fromMs, toMs: last.toMs, leftPx: first.leftPx, rightPx: last.rightPx },
    ...{ dwellCount, gapCount: run.length - dwellCount },
    shares: [...byAntenna]
      .map(([antennaId, share]) => ({ antennaId, share }))
      .sort((one, other) => other.share - one.share || one.antennaId - other.antennaId),
  };
}

/**
 * What lies under a place of the lane. A narrow neighbour within `reachPx` wins over the wide item that the place is
 * in: otherwise a short dwell could not be met with a finger. Null where there is nothing (the future).
 */
export function itemAt(items: readonly LaneItem[], placePx: number, reachPx: number): LaneItem | null {
  // First item that ends at or after the place minus the reach.
  let low = 0;
  let high = items.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (items[middle]!.rightPx < placePx - reachPx) low = middle + 1;
    else high = middle;
  }
  let found: LaneItem | null = null;
  let foundAway = Infinity;
  for (let i = low; i < items.length && items[i]!.leftPx <= placePx + reachPx; i++) {
    const item = items[i]!;
    const away = Math.max(item.leftPx - placePx, placePx - item.rightPx, 0);
    // A target as wide as the reach needs no help; it is met only where it is.
    const isNarrow = item.rightPx - item.leftPx < reachPx;
    if (away > 0 && !isNarrow) continue;
    const rank = isNarrow ? away - reachPx : away;
    if (rank < foundAway) {
      found = item;
      foundAway = rank;
    }
  }
  return found;
}

/** One key for an item, the same after the next load. */
export function laneKey(receiverId: number, item: LaneItem): string {
  return item.kind === 'dwell' ? `d${item.dwell.id}` : `${item.kind[0]}${receiverId}-${item.fromMs}`;
}
