import type { SnrLevels } from './columns.ts';
import type { DwellIndex } from './dwell-index.ts';

/** SNRs are whole decibels well inside these; what lies outside counts as the end. */
const lowestDb = -128;
const highestDb = 127;

/** Counts tagged spots by receiver, band and SNR: what a receiver can still report is read off their low end. */
export interface LevelCounts {
  add(side: number, band: number, snrDb: number): void;
  /** Ascending by receiver and band. */
  rows(): SnrLevels[];
}

export function levelCounts(sides: DwellIndex['sides']): LevelCounts {
  const counts = new Map<number, Map<number, Int32Array>>();
  // Spots come grouped by call and band: the last band is nearly always the next one.
  let lastBand = Number.NaN;
  let last: Map<number, Int32Array> | undefined;

  return {
    add(side, band, snrDb) {
      if (!last || band !== lastBand) {
        last = counts.get(band) ?? new Map<number, Int32Array>();
        counts.set(band, last);
        lastBand = band;
      }
      const receiver = sides.receiver[side]!;
      let levels = last.get(receiver);
      if (!levels) last.set(receiver, (levels = new Int32Array(highestDb - lowestDb + 1)));
      levels[Math.min(highestDb, Math.max(lowestDb, Math.round(snrDb))) - lowestDb]!++;
    },
    rows() {
      const rows: SnrLevels[] = [];
      for (const [band, byReceiver] of counts) {
        for (const [receiver, levels] of byReceiver) {
          const first = levels.findIndex((n) => n > 0);
          const end = levels.findLastIndex((n) => n > 0) + 1;
          rows.push({ receiver, band, lowestDb: lowestDb + first, spots: [...levels.subarray(first, end)] });
        }
      }
      return rows.sort((p, q) => p.receiver - q.receiver || p.band - q.band);
    },
  };
}
