import { parse } from 'csv-parse/sync';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  createLineReader,
  createRecordReader,
  longestLine,
  mostLinesInRecord,
  type FileRecord,
} from './delimited.ts';

const comma = { delimiter: ',', quote: '"', skipLines: 0 } as const;

function readAll(
  text: string,
  format: Parameters<typeof createRecordReader>[0] = comma,
  cuts: number[] = [],
): FileRecord[] {
  const reader = createRecordReader(format);
  const found: FileRecord[] = [];
  let from = 0;
  for (const cut of [...new Set(cuts)].sort((a, b) => a - b)) {
    if (cut <= from || cut >= text.length) continue;
    found.push(...reader.push(text.slice(from, cut)));
    from = cut;
  }
  return found.concat(reader.push(text.slice(from)), reader.end());
}
const cellsOf = (records: readonly FileRecord[]) => records.map(({ cells }) => cells);

/** Any text without zero bytes in its cells; at least one cell of a row has something in it. */
const cell = fc.stringMatching(/^[a-z0-9 ,;"'\n.é-]{0,8}$/);
const table = fc
  .integer({ min: 1, max: 5 })
  .chain((width) =>
    fc.array(fc.array(cell, { minLength: width, maxLength: width }), { minLength: 1, maxLength: 12 }),
  )
  .filter((rows) => rows.every((row) => row.some((text) => text.trim() !== '')));
const written = (rows: string[][], lineEnd: string) =>
  rows.map((row) => row.map((text) => `"${text.replaceAll('"', '""')}"`).join(',')).join(lineEnd) + lineEnd;

describe('createRecordReader', () => {
  it('gives back every table that was written, whatever stands in it and wherever the text is cut', () => {
    fc.assert(
      fc.property(
        table,
        fc.constantFrom('\n', '\r\n'),
        fc.array(fc.nat(300), { maxLength: 8 }),
        (rows, lineEnd, cuts) => {
          const text = written(rows, lineEnd);
          const records = readAll(text, comma, cuts);
          expect(cellsOf(records)).toEqual(rows);
          expect(records.every(({ broken }) => broken === null)).toBe(true);
        },
      ),
    );
  });

  it('reads well-formed text as csv-parse does, an independent reader, and numbers lines as it does', () => {
    fc.assert(
      fc.property(table, fc.nat(200), (rows, cut) => {
        const text = written(rows, '\n');
        const theirs = parse(text, { info: true, skip_empty_lines: true }) as unknown as {
          record: string[];
          info: { lines: number };
        }[];
        const ours = readAll(text, comma, [cut]);
        expect(cellsOf(ours)).toEqual(theirs.map(({ record }) => record));
        // Theirs is the line on which a record ends, ours the one on which it starts.
        const startLines = theirs.map(
          ({ record, info }) => info.lines - record.join('').split('\n').length + 1,
        );
        expect(ours.map(({ lineNo }) => lineNo)).toEqual(startLines);
      }),
    );
  });

  it('says the same wherever the text is cut, broken text too', () => {
    const messy = fc.stringMatching(/^[a-z"\r\n, ]{0,60}$/);
    fc.assert(
      fc.property(messy, fc.array(fc.nat(60), { maxLength: 6 }), (text, cuts) => {
        expect(readAll(text, comma, cuts)).toEqual(readAll(text));
      }),
    );
  });

  it('loses no line of any text: each one with something in it is in a record', () => {
    const messy = fc.stringMatching(/^[a-z"\n,]{0,80}$/);
    fc.assert(
      fc.property(messy, (text) => {
        const lines = text.split('\n');
        const covered = new Set(
          readAll(text).flatMap(({ lineNo, raw }) => raw.split('\n').map((_, i) => lineNo + i)),
        );
        lines.forEach((line, i) => {
          if (/[a-z]/.test(line))
            expect(covered.has(i + 1), `line ${i + 1} of ${JSON.stringify(text)}`).toBe(true);
        });
      }),
    );
  });

  it('ends lines at CR, LF and CRLF, mixed, and leaves blank ones out but counts them', () => {
    const records = readAll('a,b\r\r\nc,d\n\n  \n,\ne,f\r\ng,h');
    expect(records.map(({ lineNo, raw }) => [lineNo, raw])).toEqual([
      [1, 'a,b'],
      [3, 'c,d'],
      [7, 'e,f'],
      [8, 'g,h'],
    ]);
  });

  it('breaks the line of a stray quote only', () => {
    const records = readAll('a,b\n"c,d\ne,f\ng,"h"x\ni,j');
    expect(records.map(({ lineNo, broken, cells }) => [lineNo, broken === null ? cells : 'broken'])).toEqual([
      [1, ['a', 'b']],
      [2, 'broken'],
      [3, ['e', 'f']],
      [4, 'broken'],
      [5, ['i', 'j']],
    ]);
    expect(records[1]!.broken).toMatch(/opened and not closed/);
  });

  it('does not let two stray quotes hide the lines between them', () => {
    const between = ['e,f', 'g,h'];
    const records = readAll(['a,b', 'c,"d', ...between, 'i",j', 'k,l'].join('\n'));
    expect(records.filter(({ broken }) => broken === null).map(({ raw }) => raw)).toEqual(
      expect.arrayContaining(['a,b', ...between, 'k,l']),
    );
  });

  it('gives a quote up after so many lines', () => {
    const lines = Array.from({ length: mostLinesInRecord + 5 }, (_, i) => `a${i},b`);
    const records = readAll(['x,y', '"open,y', ...lines].join('\n'));
    expect(records).toHaveLength(lines.length + 2);
    expect(records.filter(({ broken }) => broken !== null).map(({ lineNo }) => lineNo)).toEqual([2]);
  });

  it('refuses a line without end, keeps none of it in memory, and reads on after it', () => {
    const reader = createRecordReader(comma);
    const found: FileRecord[] = [...reader.push('a,b\n')];
    for (let i = 0; i < 50; i++) found.push(...reader.push('x'.repeat(longestLine / 4)));
    found.push(...reader.push('\nc,d\n'), ...reader.end());
    expect(found.map(({ lineNo, broken }) => [lineNo, broken === null])).toEqual([
      [1, true],
      [2, false],
      [3, true],
    ]);
    expect(found[1]!.raw.length).toBeLessThan(2100);
  });

  it('takes any run of spaces for one delimiter', () => {
    const records = readAll('  a   b "c d" e \nf g h i', { ...comma, delimiter: ' ' });
    expect(cellsOf(records)).toEqual([
      ['a', 'b', 'c d', 'e'],
      ['f', 'g', 'h', 'i'],
    ]);
  });

  it('keeps quotes inside of text and skips the lines above the table', () => {
    const records = readAll('Shed log\n"half open\n5" wire,b\n', { ...comma, skipLines: 2 });
    expect(records.map(({ lineNo, cells }) => [lineNo, cells])).toEqual([[3, ['5" wire', 'b']]]);
  });

  it('leaves quotes alone where the format has none', () => {
    expect(cellsOf(readAll('"a,b"\n', { ...comma, quote: '' }))).toEqual([['"a', 'b"']]);
  });
});

describe('createLineReader', () => {
  it('gives each line that is not blank, with its number', () => {
    const reader = createLineReader(1);
    const found = [
      ...reader.push('header\n\nDX de "x'),
      ...reader.push('\r'),
      ...reader.push('\nlast'),
      ...reader.end(),
    ];
    expect(found.map(({ lineNo, cells }) => [lineNo, cells])).toEqual([
      [3, ['DX de "x']],
      [4, ['last']],
    ]);
  });
});
