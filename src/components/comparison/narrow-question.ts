import type { ComparisonAnswer, ComparisonCell } from '../../../shared/contracts/comparison.ts';
import type { QuestionBlank } from '../../../shared/contracts/comparison-sentence.ts';
import type { QuestionDraft } from '../../../shared/contracts/comparison-url.ts';

type HourBasis = ComparisonAnswer['bandHours']['basis'];

/** The question that asks about one cell of a picture only; everything else stays as it was asked. */
export function narrowQuestion(draft: QuestionDraft, cell: ComparisonCell, basis: HourBasis): QuestionDraft {
  const narrowed = { ...draft };
  if (cell.bandMetres !== null) narrowed.bandsMetres = [cell.bandMetres];
  if (cell.sector !== null) narrowed.sectors = [cell.sector];
  if (cell.night !== null) {
    narrowed.fromNight = cell.night;
    narrowed.toNight = cell.night;
  }
  if (cell.hour !== null) {
    // A UTC hour that ends at midnight ends at 0, as the clock shows it.
    const end = basis === 'utc' ? (cell.hour + 1) % 24 : cell.hour + 1;
    narrowed.hours = { from: { reference: basis, hours: cell.hour }, to: { reference: basis, hours: end } };
  }
  return narrowed;
}

/** The question about everything that these two antennas were on; rules and margin stay as they were asked. */
export function widened(draft: QuestionDraft): QuestionDraft {
  return {
    ...draft,
    bandsMetres: [],
    hours: null,
    sectors: [],
    receivers: [],
    kinds: [],
    fromNight: null,
    toNight: null,
  };
}

/** The blanks that asking about a cell would change. */
export function blanksOf(cell: ComparisonCell | null): QuestionBlank[] {
  if (cell === null) return [];
  const blanks: QuestionBlank[] = [];
  if (cell.bandMetres !== null) blanks.push('bands');
  if (cell.sector !== null) blanks.push('sectors');
  if (cell.hour !== null) blanks.push('hours');
  if (cell.night !== null) blanks.push('nights');
  return blanks;
}
