import { type Numbers, requireCount, requireNumbers } from './arguments.ts';

/**
 * The columns of a regression.
 *
 * - a plain array: one entry per row, each with the row's values (or, when it has not one entry per
 *   row, one entry per column);
 * - `columns` or `rows`: the same, said outright;
 * - `cells`: one indicator column per cell, given as the cell index of each row (0 ... cellCount - 1, or -1:
 *   in none), followed by a few dense `columns` such as receiver offsets. The indicators are never laid out.
 */
export type Design =
  | readonly Numbers[]
  | { readonly columns: readonly Numbers[] }
  | { readonly rows: readonly Numbers[] }
  | { readonly cells: Numbers; readonly cellCount: number; readonly columns?: readonly Numbers[] };

export interface CheckedDesign {
  n: number;
  /** Cell of each row, `cellCount` where it is in none; null without indicator columns. */
  cells: Int32Array | null;
  cellCount: number;
  /** Dense columns, after the cells in the order of coefficients. Not to be written to. */
  columns: Float64Array[];
}

function readColumns(columns: readonly Numbers[], n: number): Float64Array[] {
  return columns.map((column, j) => {
    if (column.length !== n) {
      throw new RangeError(`design column ${j} must have one value per row (${n}), got ${column.length}`);
    }
    requireNumbers(`design column ${j}`, column);
    return column instanceof Float64Array ? column : Float64Array.from(column);
  });
}

function readRows(rows: readonly Numbers[], n: number): Float64Array[] {
  if (rows.length !== n) throw new RangeError(`design must have one row per y (${n}), got ${rows.length}`);
  const width = rows[0]!.length;
  const columns = Array.from({ length: width }, () => new Float64Array(n));
  rows.forEach((row, i) => {
    if (row.length !== width) {
      throw new RangeError(`design row ${i} must have ${width} values like the first row, got ${row.length}`);
    }
    for (let j = 0; j < width; j++) columns[j]![i] = row[j]!;
  });
  return readColumns(columns, n);
}

function readCells(cells: Numbers, cellCount: number, n: number): Int32Array {
  requireCount('cellCount', cellCount);
  if (cells.length !== n)
    throw new RangeError(`cells must hold one index per row (${n}), got ${cells.length}`);
  let someInNone = false;
  for (let i = 0; i < n; i++) {
    const cell = cells[i]!;
    if (!(Number.isInteger(cell) && cell >= -1 && cell < cellCount)) {
      throw new RangeError(
        `cells must hold whole numbers from 0 to ${cellCount - 1}, or -1 for none; entry ${i} is ${cell}`,
      );
    }
    someInNone ||= cell === -1;
  }
  if (someInNone) return Int32Array.from(cells, (cell) => (cell === -1 ? cellCount : cell));
  return cells instanceof Int32Array ? cells : Int32Array.from(cells);
}

/** @throws RangeError naming the part of the design that does not fit n rows, or a value that is not finite */
export function readDesign(design: Design, n: number): CheckedDesign {
  let checked: CheckedDesign;
  if ('cells' in design) {
    checked = {
      n,
      cells: readCells(design.cells, design.cellCount, n),
      cellCount: design.cellCount,
      columns: readColumns(design.columns ?? [], n),
    };
  } else {
    const asRows =
      'rows' in design ? design.rows : 'columns' in design || design.length !== n ? null : design;
    const asColumns = 'columns' in design ? design.columns : 'rows' in design ? [] : design;
    const columns = asRows ? readRows(asRows, n) : readColumns(asColumns, n);
    checked = { n, cells: null, cellCount: 0, columns };
  }
  if (checked.cellCount + checked.columns.length === 0) {
    throw new RangeError('design must have at least one column');
  }
  return checked;
}
