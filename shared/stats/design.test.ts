import { describe, expect, it } from 'vitest';
import { readDesign } from './design.ts';

const columnsOf = (design: Parameters<typeof readDesign>[0], n: number) =>
  readDesign(design, n).columns.map((column) => [...column]);

describe('readDesign', () => {
  it('takes rows, columns, and a plain array of either', () => {
    const expected = [
      [1, 1, 1],
      [5, 6, 7],
    ];
    const rows = [
      [1, 5],
      [1, 6],
      [1, 7],
    ];
    expect(columnsOf({ rows }, 3)).toEqual(expected);
    expect(columnsOf(rows, 3)).toEqual(expected);
    expect(columnsOf({ columns: expected }, 3)).toEqual(expected);
    expect(columnsOf(expected, 3)).toEqual(expected);
  });

  it('keeps cells as indices beside the dense columns', () => {
    const design = readDesign({ cells: [0, 2, 2], cellCount: 3, columns: [[1, 0, -1]] }, 3);
    expect([...design.cells!]).toEqual([0, 2, 2]);
    expect(design).toMatchObject({ cellCount: 3, n: 3 });
  });

  it('names what does not fit', () => {
    expect(() => readDesign({ columns: [[1, 2]] }, 3)).toThrow(
      'design column 0 must have one value per row (3), got 2',
    );
    expect(() => readDesign({ columns: [[1, Number.NaN]] }, 2)).toThrow(/^design column 0 .* entry 1 is NaN/);
    expect(() => readDesign({ rows: [[1, 2], [1]] }, 2)).toThrow(/^design row 1 must have 2 values/);
    expect(() => readDesign({ rows: [[1]] }, 2)).toThrow(/^design must have one row per y/);
    expect(() => readDesign({ columns: [] }, 2)).toThrow('design must have at least one column');
    expect(() => readDesign({ cells: [0, 3], cellCount: 3 }, 2)).toThrow(
      /^cells .* from 0 to 2, or -1 for none; entry 1 is 3/,
    );
    expect(() => readDesign({ cells: [0], cellCount: 1 }, 2)).toThrow(/^cells must hold one index per row/);
    expect(() => readDesign({ cells: [0], cellCount: 1.5 }, 1)).toThrow(/^cellCount /);
  });
});
