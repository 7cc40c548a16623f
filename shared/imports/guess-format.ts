import type { FileFormat } from '../contracts/import.ts';
import { createTextDecoder, guessEncoding } from './decode.ts';
import { splitLine } from './delimited.ts';

export interface GuessedFormat {
  format: FileFormat;
  layout: 'table' | 'spot lines';
  /** null for files without a header line. */
  header: string[] | null;
  /** The first data rows, each with as many cells as most of them have. */
  rows: string[][];
}

const linesLooked = 200;
const delimiters = [',', ';', '\t', '|'] as const;

/** Guesses encoding, layout, delimiter, quote, preamble and header by a file's first bytes (unpacked). */
export function guessFormat(start: Buffer): GuessedFormat {
  const encoding = guessEncoding(start);
  const text = createTextDecoder(encoding).write(start);
  // The last line may be cut off by the look at the start alone.
  const all = text.split(/\r\n|\n|\r/);
  const lines = (all.length > 1 ? all.slice(0, -1) : all).slice(0, linesLooked);
  const filled = lines.filter((line) => line.trim() !== '');
  const base: FileFormat = {
    encoding,
    delimiter: ',',
    quote: '"',
    hasHeader: false,
    skipLines: 0,
    decimalComma: false,
  };
  const spotLines = filled.filter((line) => /^\s*DX\s+de\s/i.test(line)).length;
  if (filled.length > 0 && spotLines * 2 >= filled.length) {
    return { format: base, layout: 'spot lines', header: null, rows: [] };
  }
  const { delimiter, width } = guessDelimiter(filled);
  const quote = guessQuote(filled, delimiter);
  const split = (line: string): string[] => {
    const cells = splitLine(line, delimiter, quote);
    return typeof cells === 'string' ? [] : cells;
  };
  // What stands above the table has another number of columns.
  const first = lines.findIndex((line) => line.trim() !== '' && split(line).length === width);
  const skipLines = Math.max(0, first);
  const records = lines
    .slice(skipLines)
    .map(split)
    .filter((cells) => cells.length === width);
  const hasHeader = looksLikeHeader(records);
  const format: FileFormat = { ...base, delimiter, quote, hasHeader, skipLines };
  return {
    format,
    layout: 'table',
    header: hasHeader ? (records[0] ?? null) : null,
    rows: hasHeader ? records.slice(1) : records,
  };
}

/** The delimiter that gives most lines the same number of columns, and the most of them. */
function guessDelimiter(lines: readonly string[]): { delimiter: FileFormat['delimiter']; width: number } {
  let best: { delimiter: FileFormat['delimiter']; width: number } | null = null;
  for (const delimiter of delimiters) {
    const { width, share } = usualWidth(lines, delimiter);
    if (width < 2 || share < 0.6) continue;
    if (best === null || width > best.width) best = { delimiter, width };
  }
  if (best !== null) return best;
  const bySpaces = usualWidth(lines, ' ');
  if (bySpaces.width >= 2 && bySpaces.share >= 0.6) return { delimiter: ' ', width: bySpaces.width };
  return { delimiter: ',', width: 1 };
}

function usualWidth(lines: readonly string[], delimiter: string): { width: number; share: number } {
  const counts = new Map<number, number>();
  for (const line of lines) {
    const cells = splitLine(line, delimiter, '"');
    const width = typeof cells === 'string' ? 0 : cells.length;
    counts.set(width, (counts.get(width) ?? 0) + 1);
  }
  const [width, count] = [...counts].sort((a, b) => b[1] - a[1])[0] ?? [0, 0];
  return { width, share: count / Math.max(1, lines.length) };
}

/** Single quotes count only where they stand around whole cells; in words they are apostrophes. */
function guessQuote(lines: readonly string[], delimiter: string): FileFormat['quote'] {
  const around = (quote: string) =>
    lines.filter((line) =>
      line.split(delimiter).some((cell) => cell.length > 1 && cell.startsWith(quote) && cell.endsWith(quote)),
    ).length;
  return around("'") > around('"') ? "'" : '"';
}

/** A header has words where the lines below it have numbers and times. */
function looksLikeHeader(records: readonly string[][]): boolean {
  const [first, ...others] = records;
  if (first === undefined) return false;
  const isValue = (cell: string) => /\d/.test(cell);
  if (others.length === 0) return !first.some(isValue);
  const valueShare = (index: number) =>
    others.filter((cells) => isValue(cells[index] ?? '')).length / others.length;
  const told = first.filter((cell, i) => cell.trim() !== '' && !isValue(cell) && valueShare(i) > 0.5).length;
  const values = first.filter((cell, i) => isValue(cell) && valueShare(i) > 0.5).length;
  return told > values;
}
