import type { ImportMapping } from '../contracts/import.ts';

/** Why a line is not taken, and which field is at fault (null: the line as a whole). */
export interface FieldRefusal {
  field: string | null;
  reason: string;
}

/** What the reader has to know of the station. */
export interface ReadingContext {
  receivers: readonly { id: number; callSign: string }[];
  antennas: readonly { id: number; name: string }[];
  /** The present: spots of the future are refused. */
  nowMs: number;
  /** Told of each name that the station does not know, as often as it stands in the file. */
  onUnknownReceiver?: (name: string) => void;
  onUnknownAntenna?: (name: string) => void;
}

export interface MappingProblem {
  /** Path inside the mapping, for example `columns.time`. */
  path: string;
  message: string;
}

/** The mapping cannot be used, or not for this file; the file's lines are not to blame. */
export class MappingError extends Error {
  override name = 'MappingError';
  constructor(readonly problems: MappingProblem[]) {
    super(problems.map((problem) => problem.message).join(' '));
  }
}

/** Before this no receiver reported spots by itself: such a date is a mistake. */
export const earliestMs = Date.UTC(2000, 0, 1);
/** A clock or a zone that is set wrong puts a time a little ahead; more is another mistake. */
export const mostAheadMs = 86_400_000;

/** null when the time can be. */
export function checkTimeRange(atMs: number, nowMs: number): string | null {
  if (atMs >= earliestMs && atMs <= nowMs + mostAheadMs) return null;
  const written = `"${formatInstant(atMs)}"`;
  return atMs < earliestMs
    ? `The time ${written} is before the year 2000; no later than that did receivers begin to report.`
    : `The time ${written} lies in the future.`;
}

/** As the screens write it; an instant that no Date can hold is cut to the nearest that it can. */
export function formatInstant(atMs: number): string {
  const date = new Date(Math.max(-8.64e15, Math.min(8.64e15, atMs)));
  return date.toISOString().replace(/\.000Z$/, 'Z');
}

export type ColumnRef = string | number;

/**
 * The index of each mapped column in the file's lines. Names are compared without regard to letter case
 * and blanks around them; of two columns with one name the first counts. Throws a MappingError that names
 * the columns that the file does not have.
 */
export function resolveColumns<Name extends string>(
  columns: Partial<Record<Name, ColumnRef | undefined>>,
  header: readonly string[] | null,
): Partial<Record<Name, number>> {
  const problems: MappingProblem[] = [];
  const found: Partial<Record<Name, number>> = {};
  const names = header?.map(columnKey) ?? [];
  for (const [name, column] of Object.entries(columns) as [Name, ColumnRef | undefined][]) {
    if (column === undefined) continue;
    const path = `columns.${name}`;
    if (typeof column === 'number') {
      if (header !== null && column > header.length) {
        problems.push({ path, message: `The file has no column ${column}; it has ${header.length}.` });
      } else found[name] = column - 1;
      continue;
    }
    const index = names.indexOf(columnKey(column));
    if (index >= 0) found[name] = index;
    else if (header === null) {
      problems.push({ path, message: `Without a header line, give the number of the column "${column}".` });
    } else {
      const known = header.map((text) => `"${text.trim()}"`).join(', ');
      problems.push({ path, message: `The file has no column "${column}"; its columns are ${known}.` });
    }
  }
  if (problems.length > 0) throw new MappingError(problems);
  return found;
}

function columnKey(name: string): string {
  return name.trim().toLowerCase();
}

/** Holds a line's number of columns against the header's (or, without one, the first line's that fits). */
export function createWidthCheck(
  header: readonly string[] | null,
  neededColumns: number,
): (cells: readonly string[]) => string | null {
  let width = header === null ? null : usedWidth(header);
  return (cells) => {
    if (cells.length === width) return null;
    if (width === null && cells.length >= neededColumns) {
      width = cells.length;
      return null;
    }
    const usual = width ?? neededColumns;
    // Programs fill lines up with empty columns; text in one of them has slipped there from another.
    if (cells.length > usual && cells.slice(usual).every((cell) => cell.trim() === '')) return null;
    const has = cells.length === 1 ? '1 column' : `${cells.length} columns`;
    return `The line has "${has}" instead of ${usual}: a delimiter is missing or one too many.`;
  };
}

/** Without the empty columns at the end that some programs write. */
function usedWidth(cells: readonly string[]): number {
  return 1 + cells.findLastIndex((cell) => cell.trim() !== '');
}

/** How many columns a line needs so that each mapped one is there. */
export function widthNeeded(indexes: Partial<Record<string, number>>): number {
  return 1 + Math.max(-1, ...Object.values(indexes).map((index) => index ?? -1));
}

/**
 * The receiver that a name in a file stands for: as the mapping says, else the one with that call sign,
 * whatever mark (`-#`, `-1`) a skimmer put behind it.
 */
export function createReceiverFinder(
  mapping: Pick<ImportMapping, 'receiverNames'>,
  receivers: ReadingContext['receivers'],
): (name: string) => number | null {
  const byName = new Map(Object.entries(mapping.receiverNames).map(([name, id]) => [name.trim(), id]));
  const byCall = new Map(receivers.map(({ id, callSign }) => [callSign.toUpperCase(), id]));
  const found = new Map<string, number | null>();
  return (name) => {
    const known = found.get(name);
    if (known !== undefined) return known;
    const trimmed = name.trim();
    const upper = trimmed.toUpperCase().replace(/-#$/, '');
    const id = byName.get(trimmed) ?? byCall.get(upper) ?? byCall.get(bareReceiverCall(trimmed)) ?? null;
    if (found.size < 10_000) found.set(name, id);
    return id;
  };
}

/** A receiver's call sign without the mark of its skimmer: `EI7QSA-#` and `ei7qsa-2-#` are EI7QSA. */
export function bareReceiverCall(name: string): string {
  return name
    .trim()
    .toUpperCase()
    .replace(/(?:-\d{1,2})?(?:-#)?$/, '');
}
