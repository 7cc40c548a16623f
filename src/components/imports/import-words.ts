import type { ImportKind, ImportRecord } from '../../../shared/contracts/import.ts';
import { countOf, formatCount, formatUtc } from '../../../shared/format.ts';

export const kindWords: Readonly<Record<ImportKind, string>> = { spots: 'Spots', dwells: 'Switch log' };

const stateWords: Readonly<Record<ImportRecord['state'], string>> = {
  uploading: 'On its way',
  uploaded: 'Columns to choose',
  queued: 'Waiting',
  running: 'Reading',
  done: 'Imported',
  failed: 'Failed',
  cancelled: 'Cancelled',
  undone: 'Undone',
};

export function stateWord(state: ImportRecord['state']): string {
  return stateWords[state];
}

/** "12 480 spots", "1 dwell". */
export function rowsOf(kind: ImportKind, count: number): string {
  return countOf(count, kind === 'spots' ? 'spot' : 'dwell');
}

/** How the rows of a file add up: each part, in the order in which it is told. */
export function countParts(record: ImportRecord): { label: string; count: number; hint: string }[] {
  return [
    {
      label: 'stored',
      count: record.rowsStored,
      hint:
        record.rowsUndone === 0
          ? 'New to the station.'
          : record.rowsUndone === record.rowsStored
            ? 'Removed again, all of them.'
            : `${formatCount(record.rowsUndone)} of them removed again.`,
    },
    {
      label: 'doubled',
      count: record.rowsDoubled,
      hint: 'The station had them already; nothing is stored twice.',
    },
    { label: 'refused', count: record.rowsRefused, hint: 'Kept with their reasons below.' },
    { label: 'left out', count: record.rowsSkipped, hint: 'Of receivers that are not the station’s.' },
  ];
}

/** The same as a sentence: "100 rows read: 90 stored, 5 doubled, 5 refused, 0 left out." */
export function countsSentence(record: ImportRecord): string {
  const parts = countParts(record).map(({ label, count }) => `${formatCount(count)} ${label}`);
  return `${countOf(record.rowsRead, 'row')} read: ${parts.join(', ')}.`;
}

/** What undoing an import would remove, before it is done. */
export function undoSentences(record: ImportRecord): string[] {
  const left = record.rowsStored - record.rowsUndone;
  const span =
    record.firstAt !== null && record.lastAt !== null
      ? record.kind === 'spots'
        ? `, heard from ${formatUtc(record.firstAt)} to ${formatUtc(record.lastAt)}`
        : `, from ${formatUtc(record.firstAt)} to ${formatUtc(record.lastAt)}`
      : '';
  const where = record.kind === 'spots' ? '' : ' from the switch log';
  return [
    `${rowsOf(record.kind, left)} that this import added ${left === 1 ? 'is' : 'are'} removed${where}${span}.`,
    record.kind === 'spots'
      ? 'Spots that other files or the live feed brought stay.'
      : 'Spots of that time lose these antennas; no spot is removed.',
    'Units of that time are made anew, so comparisons over it change.',
    'The file, its counts and its refused lines stay, and the file can be read again.',
  ];
}
