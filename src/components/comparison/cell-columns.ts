import type { ComparisonCell } from '../../../shared/contracts/comparison.ts';
import type { CellView } from '../../../shared/pictures/pooled-cells.ts';
import type { PictureCell } from '../../../shared/pictures/picture.ts';
import type { DataColumn } from '../base/data-table.ts';

/** Four decimals serve whoever goes on computing; more would only claim more. */
export const rounded = (value: number | null | undefined) =>
  value === null || value === undefined ? null : Number(value.toFixed(4));

/** A column of numbers read from the part of a picture that a row stands for. */
export function numberColumn(
  key: string,
  label: string,
  unit: string | undefined,
  read: (part: PictureCell) => number | null | undefined,
): DataColumn<PictureCell> {
  return {
    ...{ key, label, unit, align: 'end', sortable: true },
    value: (part) => rounded(read(part)),
  };
}

/** The table of a picture of cells. `rawOf` finds the cell as it was before pooling. */
export function cellColumns(
  first: string,
  view: CellView,
  rawOf: (part: PictureCell) => ComparisonCell | null,
): DataColumn<PictureCell>[] {
  const raw = (
    key: string,
    label: string,
    unit: string | undefined,
    read: (cell: ComparisonCell) => number | null,
  ) =>
    numberColumn(key, label, unit, (part) => {
      const cell = rawOf(part);
      return cell && read(cell);
    });
  const pooled = [
    raw('pooled', 'Pooled', 'dB', (cell) => cell.pooledDb),
    raw('pooled-low', '95\u2009% from', 'dB', (cell) => cell.pooledIntervalDb?.[0] ?? null),
    raw('pooled-high', 'to', 'dB', (cell) => cell.pooledIntervalDb?.[1] ?? null),
  ];
  return [
    { key: 'place', label: first, value: ({ title }) => title, isRowHeader: true },
    raw('estimate', view === 'pooled' ? 'Raw difference' : 'Difference', 'dB', (cell) => cell.estimateDb),
    raw('low', '95\u2009% from', 'dB', (cell) => cell.intervalDb?.[0] ?? null),
    raw('high', 'to', 'dB', (cell) => cell.intervalDb?.[1] ?? null),
    ...(view === 'pooled' ? pooled : []),
    raw('units', 'Units', undefined, (cell) => cell.units),
    raw('clusters', 'Station-nights', undefined, (cell) => cell.clusters),
    raw('nights', 'Nights', undefined, (cell) => cell.nights),
    {
      ...raw('p', 'p adjusted', undefined, (cell) => cell.pAdjusted),
      hint: 'Benjamini-Hochberg across the cells of this picture',
    },
    { key: 'speaks', label: 'Enough evidence', value: ({ cell }) => (cell?.speaks ? 'yes' : 'no') },
  ];
}
