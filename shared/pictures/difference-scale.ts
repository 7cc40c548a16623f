import type { ComparisonAnswer } from '../contracts/comparison.ts';

/** The one dB axis of all pictures and of the verdict: symmetric about zero. */
export interface DifferenceScale {
  /** The axis runs from -limitDb to +limitDb. */
  limitDb: number;
  stepDb: number;
  /** Difference at which the colours of the maps are full. */
  fullColourDb: number;
}

/** Units beyond this share are gathered at the ends, so that a few wild ones don't flatten every picture. */
const shownShare = 0.95;
/** How far the intervals that stand beside the estimate may widen the axis; further out they are cut, with a mark. */
const besideShare = 1.5;
const stepsDb = [0.5, 1, 2, 3, 4, 5, 10, 20, 50];

/**
 * Chooses the axis from the answer: it holds 95 % of the units, the whole interval of the estimate, the
 * margin, the censored estimate and the estimates of all cells that speak. The intervals of the censored
 * estimate and of the last night's peek-proof one widen it by half at most; those of earlier nights, which
 * may be wild, not at all. An answer without data gets 6 dB either way.
 */
export function differenceScale(answer: ComparisonAnswer): DifferenceScale {
  const speaking = [...answer.sectors, ...answer.bandHours.cells, ...answer.nights].filter(
    (cell) => cell.speaks && cell.estimateDb !== null,
  );
  const estimates = speaking.map((cell) => Math.abs(cell.estimateDb!));
  const mapped = [...answer.sectors, ...answer.bandHours.cells].filter(
    (cell) => cell.speaks && cell.estimateDb !== null,
  );
  const interval = answer.estimate?.interval95Db ?? [0, 0];
  const needed = Math.max(
    unitsWithinDb(answer),
    ...interval.map(Math.abs),
    answer.marginDb * 1.5,
    Math.abs(answer.censored?.estimateDb ?? 0),
    ...estimates,
  );
  const beside = [
    ...(answer.censored?.intervalDb ?? []),
    ...(answer.peekProof?.points.at(-1)?.intervalDb ?? []),
  ].map(Math.abs);
  const widest = Math.max(needed, ...beside.map((db) => Math.min(db, needed * besideShare)));
  const wanted = answer.counts.units === 0 ? 6 : widest;
  const stepDb = stepsDb.find((step) => Math.ceil(wanted / step - 1e-9) <= 4) ?? wanted / 4;
  const limitDb = stepDb * Math.max(1, Math.ceil(wanted / stepDb - 1e-9));
  const strongest = Math.max(3, ...mapped.map((cell) => Math.abs(cell.estimateDb!)));
  return { limitDb, stepDb, fullColourDb: Math.min(Math.ceil(strongest), limitDb) };
}

/** Half-width of the smallest range about zero that holds 95 % of the units. */
function unitsWithinDb(answer: ComparisonAnswer): number {
  const { bins, binWidthDb } = answer.histogram;
  const reach = bins
    .map((bin) => ({
      db: Math.max(Math.abs(bin.fromDb), Math.abs(bin.fromDb + binWidthDb)),
      units: bin.units,
    }))
    .sort((one, other) => one.db - other.db);
  const total = reach.reduce((sum, bin) => sum + bin.units, 0);
  let held = 0;
  for (const bin of reach) {
    held += bin.units;
    if (held >= total * shownShare) return bin.db;
  }
  return 0;
}

/** Place of a difference on an axis of the given length; what lies beyond sits at the end. */
export function placeOnScale(db: number, limitDb: number, length: number): number {
  const share = (db + limitDb) / (2 * limitDb);
  return Math.min(1, Math.max(0, share)) * length;
}

export function scaleTicks({ limitDb, stepDb }: DifferenceScale): number[] {
  const count = Math.round(limitDb / stepDb);
  return Array.from({ length: 2 * count + 1 }, (_, index) => (index - count) * stepDb);
}
