import type { FileFormat } from '../contracts/import.ts';

/**
 * A reader of delimited text of our own, where a library would be the rule. Measured on a million rows of
 * seven columns: csv-parse 7 takes several times as long as everything else that an import does, the
 * database included (tests/bench/import.bench.ts prints it). And an import needs what a CSV library does
 * not offer: one opening quote too many must cost its own line, not the rest of the file, and each refusal
 * names the line as an editor counts it. csv-parse is the tests' independent check.
 */
export interface FileRecord {
  /** Line of the file on which the record starts; 1 is the first. */
  lineNo: number;
  /** As it stands in the file; line breaks inside quotes are `\n`. Cut at `longestRaw`. */
  raw: string;
  cells: string[];
  /** Why the record cannot be taken apart; null when it was. */
  broken: string | null;
}

export interface RecordReader {
  /** Records completed by this piece of text. */
  push(text: string): FileRecord[];
  /** Records completed by the file's end. */
  end(): FileRecord[];
}

type DelimitedFormat = Pick<FileFormat, 'delimiter' | 'quote' | 'skipLines'>;

/** A line of more is no line of a table: it is refused without being kept in memory. */
export const longestLine = 65_536;
/** Kept of a refused line. */
export const longestRaw = 2_000;
/** A quote that is open for more lines was opened by mistake. */
export const mostLinesInRecord = 20;

/**
 * Reads records of cells (RFC 4180, with any delimiter and quote): line ends of any kind, mixed too; quoted
 * cells may hold delimiters, doubled quotes and line breaks. Between spaces as delimiters, any number of
 * them counts as one. Blank lines and lines of empty cells are left out.
 *
 * A quote that is not closed, or closed and followed by text, breaks the record of its own line only: the
 * lines after it are read as if they stood alone. A record over several lines counts only when it has as
 * many cells as the first record of the file, so that two stray quotes cannot hide the lines between them.
 */
export function createRecordReader(format: DelimitedFormat): RecordReader {
  const { delimiter, quote, skipLines } = format;
  let usualCells: number | null = null;
  /** Lines of a record whose quote is still open. */
  let open: { lineNo: number; lines: string[] } | null = null;

  function take(line: string, lineNo: number, out: FileRecord[]): void {
    if (open !== null) {
      takeContinued(open, line, out);
      return;
    }
    if (line === '') return;
    const cells = splitLine(line, delimiter, quote);
    if (typeof cells === 'string') {
      if (cells === unclosed) open = { lineNo, lines: [line] };
      else emit(lineNo, line, [], cells, out);
      return;
    }
    if (cells[0] === '' && cells.every((cell) => cell.trim() === '')) return;
    if (cells.length === 1 && cells[0]!.trim() === '') return;
    usualCells ??= cells.length;
    emit(lineNo, line, cells, null, out);
  }

  function takeContinued(record: { lineNo: number; lines: string[] }, line: string, out: FileRecord[]): void {
    record.lines.push(line);
    const whole = record.lines.join('\n');
    const cells = splitLine(whole, delimiter, quote);
    if (cells === unclosed && record.lines.length < mostLinesInRecord && whole.length <= longestLine) return;
    open = null;
    if (typeof cells !== 'string' && (usualCells === null || cells.length === usualCells)) {
      usualCells ??= cells.length;
      emit(record.lineNo, whole, cells, null, out);
    } else giveUp(record, out);
  }

  /** The first line is broken; the others are read on their own. */
  function giveUp(record: { lineNo: number; lines: string[] }, out: FileRecord[]): void {
    const [first, ...others] = record.lines;
    emit(record.lineNo, first!, [], unclosed, out);
    others.forEach((line, i) => take(line, record.lineNo + 1 + i, out));
  }

  const lines = createLineSplitter((line, lineNo, out) => {
    if (lineNo > skipLines) take(line, lineNo, out);
  }, skipLines);
  return {
    push: (text) => lines.push(text),
    end() {
      const out = lines.end();
      while (open !== null) {
        const record: { lineNo: number; lines: string[] } = open;
        open = null;
        giveUp(record, out);
      }
      return out;
    },
  };
}

/** Reads each line that is not blank as a record of one cell. */
export function createLineReader(skipLines: number): RecordReader {
  return createLineSplitter((line, lineNo, out) => {
    if (lineNo > skipLines && line.trim() !== '') emit(lineNo, line, [line], null, out);
  }, skipLines);
}

function emit(lineNo: number, raw: string, cells: string[], broken: string | null, out: FileRecord[]): void {
  out.push({ lineNo, raw: raw.length > longestRaw ? `${raw.slice(0, longestRaw)}…` : raw, cells, broken });
}

type TakeLine = (line: string, lineNo: number, out: FileRecord[]) => void;

function createLineSplitter(take: TakeLine, skipLines: number): RecordReader {
  let carry = '';
  let lineNo = 0;
  /** The last piece ended in a carriage return: a line feed that follows belongs to it. */
  let afterReturn = false;
  /** Inside a line that is too long, and refused already. */
  let skipping = false;

  function finish(line: string, out: FileRecord[]): void {
    lineNo++;
    if (skipping) skipping = false;
    else if (line.length > longestLine) refuseLong(line, out);
    else take(line, lineNo, out);
  }

  function refuseLong(line: string, out: FileRecord[]): void {
    if (lineNo <= skipLines) return;
    emit(lineNo, line, [], `The line is longer than ${longestLine} characters.`, out);
  }

  return {
    push(piece) {
      const out: FileRecord[] = [];
      if (piece === '') return out;
      let at = afterReturn && piece.startsWith('\n') ? 1 : 0;
      afterReturn = false;
      let feed = piece.indexOf('\n', at);
      let turn = piece.indexOf('\r', at);
      while (feed !== -1 || turn !== -1) {
        const isReturn = turn !== -1 && (feed === -1 || turn < feed);
        const end = isReturn ? turn : feed;
        const line = piece.slice(at, end);
        finish(carry === '' ? line : carry + line, out);
        carry = '';
        at = end + 1;
        if (isReturn) {
          if (at === piece.length) afterReturn = true;
          else if (at === feed) at++;
          turn = piece.indexOf('\r', at);
        }
        if (feed !== -1 && feed < at) feed = piece.indexOf('\n', at);
      }
      if (!skipping) carry += piece.slice(at);
      if (carry.length > longestLine) {
        lineNo++;
        refuseLong(carry, out);
        // Counted already: it is counted again when its end is found.
        lineNo--;
        skipping = true;
        carry = '';
      }
      return out;
    },
    end() {
      const out: FileRecord[] = [];
      if (carry !== '') finish(carry, out);
      carry = '';
      return out;
    },
  };
}

const unclosed = 'A quote is opened and not closed; close it, or leave it out.';

/** The cells of a line, or the sentence that says why it has none. */
export function splitLine(line: string, delimiter: string, quote: string): string[] | string {
  if (quote === '' || !line.includes(quote)) {
    if (delimiter !== ' ') return line.split(delimiter);
    return line.trim().split(/ +/);
  }
  const cells: string[] = [];
  let at = 0;
  for (;;) {
    if (delimiter === ' ') while (line[at] === ' ') at++;
    if (line[at] === quote) {
      let cell = '';
      let from = at + 1;
      for (;;) {
        const close = line.indexOf(quote, from);
        if (close === -1) return unclosed;
        cell += line.slice(from, close);
        at = close + 1;
        if (line[at] !== quote) break;
        cell += quote;
        from = at + 1;
      }
      cells.push(cell);
      if (at < line.length && line[at] !== delimiter) {
        return `Text follows the closing quote of column ${cells.length}; double a quote that belongs to the text.`;
      }
    } else {
      const end = line.indexOf(delimiter, at);
      cells.push(line.slice(at, end === -1 ? line.length : end));
      at = end === -1 ? line.length : end;
    }
    if (at >= line.length) return trimLast(cells, delimiter);
    at++;
  }
}

/** Spaces at a line's end are no column. */
function trimLast(cells: string[], delimiter: string): string[] {
  if (delimiter === ' ' && cells.length > 1 && cells.at(-1) === '') cells.pop();
  return cells;
}
