import type { DwellIndex } from './dwell-index.ts';
import type { ListeningColumns, PairingWindow } from './columns.ts';
import type { PairingRules } from './rules.ts';

/** The blocks that start in a window: whole numbers of blocks since 1970, `first` to `end - 1`. */
export interface BlockRange {
  first: number;
  end: number;
  blockMs: number;
  blockMinutes: number;
}

/** Ten years of five-minute blocks: a longer window is a mistake in its unit. */
const MOST_BLOCKS = 1_100_000;

/** Throws RangeError when the window is not finite, runs backwards or is longer than ten years. */
export function blocksOf(window: PairingWindow, blockMinutes: number): BlockRange {
  const { startMs, endMs } = window;
  if (!(Number.isFinite(startMs) && Number.isFinite(endMs) && startMs <= endMs)) {
    throw new RangeError(
      `The window runs from ${startMs} to ${endMs}; it needs two times, the earlier first.`,
    );
  }
  const blockMs = blockMinutes * 60_000;
  const first = Math.ceil(startMs / blockMs);
  const end = Math.ceil(endMs / blockMs);
  if (end - first > MOST_BLOCKS) throw new RangeError('The window is longer than ten years.');
  return { first, end, blockMs, blockMinutes };
}

/**
 * The stretch of time `[startMs, endMs)` whose spots `pairSpots` must be given for a window, so that
 * units at the window's edges come out as in one run over everything: the whole of the last block that
 * starts in the window, and twice the matching window on both sides (a match's midpoint lies half a
 * window from its spots, and what is nearest to them is decided within one more).
 */
export function spotsNeeded(window: PairingWindow, rules: PairingRules): PairingWindow {
  const { first, end, blockMs } = blocksOf(window, rules.blockMinutes);
  const marginMs = 2 * rules.windowSeconds * 1000;
  return { startMs: first * blockMs - marginMs, endMs: end * blockMs + marginMs };
}

/** Who listened for how long in each block. */
export interface Listening {
  /** Milliseconds that a side (receiver and antenna) listened outside guards in a block. */
  ofSide(side: number, block: number): number;
  /**
   * Antenna pairs (dense antenna numbers, two by two, the lower first) whose heard-only stations count
   * in the block.
   */
  comparablePairs(block: number): readonly number[];
  columns(): ListeningColumns;
}

const SHORTEST_LISTENING_MS = 120_000;

/**
 * Adds up listening time per block. An antenna's time is the sum over its receivers, not their union:
 * two receivers on one antenna have two chances to hear a station, and against one receiver on the
 * other antenna that would be no fair count, so such a block drops out by the 20 % rule, which reads
 * |LA - LB| <= 0.2 max(LA, LB). An open dwell listens to the end of the window's last block.
 */
export function listeningTimes(
  index: DwellIndex,
  antennaOfSide: Int32Array,
  antennaCount: number,
  range: BlockRange,
  guardSeconds: number,
): Listening {
  const { first, end, blockMs } = range;
  const sideCount = antennaOfSide.length;
  const blockCount = end - first;
  const bySide = new Float64Array(sideCount * blockCount);
  for (let p = 0; p < index.startMs.length; p++) {
    const from = Math.max(index.startMs[p]! + guardSeconds * 1000, first * blockMs);
    const to = Math.min(index.endMs[p]!, end * blockMs);
    for (let block = Math.floor(from / blockMs); block * blockMs < to; block++) {
      const heardMs = Math.min(to, (block + 1) * blockMs) - Math.max(from, block * blockMs);
      if (heardMs > 0) bySide[(block - first) * sideCount + index.side[p]!]! += heardMs;
    }
  }

  const byAntenna = new Float64Array(antennaCount);
  const comparable: (readonly number[])[] = [];
  for (let b = 0; b < blockCount; b++) {
    byAntenna.fill(0);
    for (let s = 0; s < sideCount; s++) byAntenna[antennaOfSide[s]!]! += bySide[b * sideCount + s]!;
    comparable.push(comparableIn(byAntenna));
  }

  return {
    ofSide: (side, block) => bySide[(block - first) * sideCount + side]!,
    comparablePairs: (block) => comparable[block - first]!,
    columns: () => listeningColumns(bySide, index.sides, range),
  };
}

function comparableIn(listenedMs: Float64Array): number[] {
  const pairs: number[] = [];
  for (let a = 0; a < listenedMs.length; a++) {
    if (listenedMs[a]! < SHORTEST_LISTENING_MS) continue;
    for (let b = a + 1; b < listenedMs.length; b++) {
      if (listenedMs[b]! < SHORTEST_LISTENING_MS) continue;
      const longer = Math.max(listenedMs[a]!, listenedMs[b]!);
      // 20 % in whole milliseconds: 0.2 times a time is not exact.
      if (5 * Math.abs(listenedMs[a]! - listenedMs[b]!) <= longer) pairs.push(a, b);
    }
  }
  return pairs;
}

function listeningColumns(
  bySide: Float64Array,
  sides: DwellIndex['sides'],
  range: BlockRange,
): ListeningColumns {
  const sideCount = sides.receiver.length;
  const listened = bySide.reduce((count, listenedMs) => (listenedMs > 0 ? count + 1 : count), 0);
  const columns: ListeningColumns = {
    receiver: new Int32Array(listened),
    antenna: new Int32Array(listened),
    blockMinute: new Int32Array(listened),
    seconds: new Float64Array(listened),
  };
  let row = 0;
  for (let i = 0; i < bySide.length; i++) {
    if (!(bySide[i]! > 0)) continue;
    const side = i % sideCount;
    columns.receiver[row] = sides.receiver[side]!;
    columns.antenna[row] = sides.antenna[side]!;
    columns.blockMinute[row] = (range.first + Math.floor(i / sideCount)) * range.blockMinutes;
    columns.seconds[row] = bySide[i]! / 1000;
    row++;
  }
  return columns;
}
