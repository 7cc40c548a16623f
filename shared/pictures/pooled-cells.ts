import type { ComparisonAnswer, ComparisonCell } from '../contracts/comparison.ts';
import { formatDb, formatDbInterval, formatNumber, formatShare } from '../format.ts';
import type { Picture, PictureCell } from './picture.ts';
import { pText } from './fairness-words.ts';

/** Whether the maps show each cell by itself, or drawn toward the mean of its picture. */
export type CellView = 'raw' | 'pooled';

/**
 * The answer with pooled cells in place of the raw ones, for the picture builders. A cell that was not pooled
 * (too little evidence, or a picture with fewer than two cells that speak) stays as it was: pooling lends it
 * no evidence.
 */
export function pooledAnswer(answer: ComparisonAnswer): ComparisonAnswer {
  return {
    ...answer,
    sectors: answer.sectors.map(pooledCell),
    bandHours: { ...answer.bandHours, cells: answer.bandHours.cells.map(pooledCell) },
    nights: answer.nights.map(pooledCell),
  };
}

function pooledCell(cell: ComparisonCell): ComparisonCell {
  return cell.pooledDb === null || !cell.speaks
    ? cell
    : { ...cell, estimateDb: cell.pooledDb, intervalDb: cell.pooledIntervalDb };
}

/** A picture of pooled cells whose words name the raw value too. */
export function sayRaw(picture: Picture, rawOf: (part: PictureCell) => ComparisonCell | null): Picture {
  return {
    ...picture,
    cells: picture.cells.map((part) => {
      const raw = rawOf(part);
      return raw?.pooledDb == null || !raw.speaks
        ? part
        : { ...part, words: `${part.words} Pooled; raw ${formatDb(raw.estimateDb)}.` };
    }),
  };
}

/** The exact numbers behind a pooling's sentence. */
export function poolingNumbers(pooling: NonNullable<ComparisonAnswer['pooling']['sectors']>): string {
  const { tauDb, q, df, p, iSquared, cells, meanDb, intervalDb } = pooling;
  return (
    `Random effects over ${cells} cells: tau ${formatNumber(tauDb, 2)}\u2009dB (Paule-Mandel); Q ${formatNumber(q)} ` +
    `on ${df} degrees of freedom, p ${pText(p)}; I\u00b2 ${formatShare(iSquared)}. Mean of the cells ` +
    `${formatDb(meanDb)}, 95\u2009% interval ${formatDbInterval(intervalDb)}.`
  );
}
