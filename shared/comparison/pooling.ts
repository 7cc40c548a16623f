import type { ComparisonAnswer, ComparisonCell, ComparisonPooling } from '../contracts/comparison.ts';
import { pool } from '../stats/index.ts';
import { decibels } from './wording.ts';

/** A cell with the standard error that its interval rests on. */
export interface CellWithError {
  cell: ComparisonCell;
  seDb: number | null;
}

/**
 * Random effects over the cells of a picture that speak (2.4, item 9 of the method): how much they differ beyond
 * chance, and each of them drawn toward their mean by what it does not know. Writes the pooled values into the
 * cells. Null with fewer than two.
 */
export function poolCells(rows: readonly CellWithError[], what: string): ComparisonPooling | null {
  const speaking = rows.filter(({ cell, seDb }) => cell.speaks && seDb !== null && cell.estimateDb !== null);
  if (speaking.length < 2) return null;
  const pooled = pool(
    speaking.map(({ cell }) => cell.estimateDb!),
    speaking.map(({ seDb }) => seDb!),
    { method: 'paule-mandel' },
  );
  const { cells, interval, qP, tau, q, qDf, iSquared } = pooled;
  if (cells === null || interval === null || qP === null) return null;
  cells.forEach((own, k) => {
    const { cell } = speaking[k]!;
    cell.pooledDb = own.estimate;
    cell.pooledIntervalDb = [own.interval[0], own.interval[1]];
  });
  const spread = { tauDb: tau, p: qP, iSquared };
  return {
    cells: speaking.length,
    meanDb: pooled.estimate,
    intervalDb: [interval[0], interval[1]],
    ...{ ...spread, q, df: qDf },
    sentence: poolingSentence(spread, what),
  };
}

function poolingSentence(
  { tauDb, p, iSquared }: Pick<ComparisonPooling, 'tauDb' | 'p' | 'iSquared'>,
  what: string,
): string {
  const share = `${Math.round(iSquared * 100)}\u2009% of the spread between them is more than chance`;
  if (p < 0.05) {
    return `The ${what} truly differ, by about ${decibels(tauDb)}\u2009dB around their mean: ${share}.`;
  }
  return tauDb < 0.05
    ? `The ${what} differ by no more than chance: one number serves them all.`
    : `The ${what} may differ (by about ${decibels(tauDb)}\u2009dB; ${share}), but chance alone could look like this.`;
}

/** The three pictures' words for their cells. */
export const pooledPictures: Readonly<Record<keyof ComparisonAnswer['pooling'], string>> = {
  sectors: 'directions',
  bandHours: 'bands and hours',
  nights: 'nights',
};
