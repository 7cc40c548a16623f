import type { Cell } from '../../composables/save-file.ts';

/** One column of a DataTable. `value` serves sorting and CSV, and the cell unless a slot `cell-<key>` draws it. */
export interface DataColumn<Row> {
  key: string;
  label: string;
  /** Shown in the header, and in the CSV's header: "dB". */
  unit?: string;
  value: (row: Row) => Cell;
  /** Text of the cell where it differs from the value. */
  text?: (row: Row) => string;
  /** Numbers stand at the end. */
  align?: 'start' | 'end';
  sortable?: boolean;
  /** What the column says, for whoever does not know the term. */
  hint?: string;
  /** Not shown until chosen. */
  hidden?: boolean;
  /** The cell that names the row; one a table. */
  isRowHeader?: boolean;
}

export interface Sorting {
  key: string;
  descending: boolean;
}

/** Rows in the order asked for; empty cells always last; texts with numbers in them in the order a person expects. */
export function sortRows<Row>(
  rows: readonly Row[],
  columns: readonly DataColumn<Row>[],
  sorting: Sorting | null,
): readonly Row[] {
  const column = columns.find((each) => each.key === sorting?.key);
  if (!column || !sorting) return rows;
  const sign = sorting.descending ? -1 : 1;
  return [...rows].sort((one, other) => {
    const left = column.value(one);
    const right = column.value(other);
    if (isEmpty(left) || isEmpty(right)) return Number(isEmpty(left)) - Number(isEmpty(right));
    return sign * compare(left!, right!);
  });
}

function compare(left: string | number, right: string | number): number {
  if (typeof left === 'number' && typeof right === 'number') return left - right;
  return String(left).localeCompare(String(right), 'en', { numeric: true });
}

function isEmpty(cell: Cell): boolean {
  return cell === null || cell === undefined || cell === '' || Number.isNaN(cell);
}

export function cellText<Row>(column: DataColumn<Row>, row: Row): string {
  if (column.text) return column.text(row);
  const value = column.value(row);
  return value === null || value === undefined ? '' : String(value);
}
