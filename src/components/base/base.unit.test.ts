import { describe, expect, it } from 'vitest';
import { toCsv } from '../../composables/save-file.ts';
import { antennaLook } from './antenna-look.ts';
import { sortRows } from './data-table.ts';

describe('the look of an antenna', () => {
  it('is another one for every letter, in shape or in colour', () => {
    const looks = [...'ABCDEFGHIJKLMNOPQRSTUVWXYZ'].map(antennaLook);
    expect(new Set(looks.map((look) => `${look.shape} ${look.colour}`)).size).toBe(26);
    expect(new Set(looks.map((look) => look.shape)).size).toBe(6);
  });
  it('is the same for a small letter and for blanks around it', () => {
    expect(antennaLook(' d ')).toEqual(antennaLook('D'));
  });
  it('is a question mark for what is no letter', () => {
    expect([null, '', '7', 'Ä'].map((marker) => antennaLook(marker).letter)).toEqual(['?', '?', '?', '?']);
  });
});

describe('sorting a table', () => {
  type Row = { name: string; db: number | null };
  const rows: Row[] = [
    { name: 'Wire 10', db: -2 },
    { name: 'Wire 9', db: null },
    { name: 'wire 1', db: 11 },
    { name: 'Wire 2', db: 3 },
  ];
  const columns = [
    { key: 'name', label: 'Antenna', value: (row: Row) => row.name },
    { key: 'db', label: 'Difference', unit: 'dB', value: (row: Row) => row.db },
  ];
  const order = (key: string, descending: boolean) =>
    sortRows(rows, columns, { key, descending }).map((row) => row.name);

  it('takes numbers as numbers and keeps empty cells last both ways', () => {
    expect(order('db', false)).toEqual(['Wire 10', 'Wire 2', 'wire 1', 'Wire 9']);
    expect(order('db', true)).toEqual(['wire 1', 'Wire 2', 'Wire 10', 'Wire 9']);
  });
  it('takes numbers inside of names as a person does', () => {
    expect(order('name', false)).toEqual(['wire 1', 'Wire 2', 'Wire 9', 'Wire 10']);
  });
  it('leaves the rows alone without a column to sort by', () => {
    expect(sortRows(rows, columns, null)).toBe(rows);
    expect(sortRows(rows, columns, { key: 'gone', descending: false })).toBe(rows);
  });
});

describe('CSV for people', () => {
  it('quotes commas, quotes and line ends as RFC 4180 says', () => {
    expect(toCsv(['a', 'b "c"'], [['x,y', 'one\ntwo']])).toBe('a,"b ""c"""\r\n"x,y","one\ntwo"\r\n');
  });
  it('disarms what a spreadsheet would run, and leaves negative numbers numbers', () => {
    expect(toCsv(['v'], [['=1+1'], ['-2+cmd'], ['@x'], ['\tx'], [-1.5], [null], [Number.NaN]])).toBe(
      "v\r\n'=1+1\r\n'-2+cmd\r\n'@x\r\n'\tx\r\n-1.5\r\n\r\n\r\n",
    );
  });
});
