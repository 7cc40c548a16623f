import type { ComparisonCell, ComparisonQuestion } from '../contracts/comparison.ts';
import { nightDate } from '../radio/night.ts';
import { benjaminiHochberg, clusterRegression, tResult } from '../stats/index.ts';
import type { ClusterRegressionResult, Coefficient, TResult } from '../stats/index.ts';
import { inNoCell } from './common-antenna.ts';
import { twoWays } from './fit.ts';
import type { OffsetColumn } from './offsets.ts';
import type { CellWithError } from './pooling.ts';
import { NO_HOUR, NO_SECTOR } from './selection.ts';
import type { SelectedUnits } from './selection.ts';

/** A cell speaks only with this much evidence (2.4, item 8 of the method). */
export const CELL_MIN_CLUSTERS = 8;
export const CELL_MIN_NIGHTS = 3;

type Place = Pick<ComparisonCell, 'bandMetres' | 'sector' | 'hour' | 'night'>;
const nowhere: Place = { bandMetres: null, sector: null, hour: null, night: null };

/** Which cell a unit falls into (null: none), under a key that sorts. */
export interface Layout {
  keyOf: (units: SelectedUnits, i: number) => number | null;
  placeOf: (key: number) => Place;
  minNights: number;
}

export const bySector: Layout = {
  keyOf: (units, i) => (units.sector[i] === NO_SECTOR ? null : units.sector[i]!),
  placeOf: (key) => ({ ...nowhere, sector: key }),
  minNights: CELL_MIN_NIGHTS,
};

const hourShift = 1000;
export const byBandAndHour: Layout = {
  keyOf: (units, i) =>
    units.hour[i] === NO_HOUR ? null : units.band[i]! * 10_000 + units.hour[i]! + hourShift,
  placeOf: (key) => ({ ...nowhere, bandMetres: Math.floor(key / 10_000), hour: (key % 10_000) - hourShift }),
  minNights: CELL_MIN_NIGHTS,
};

export const byNight: Layout = {
  keyOf: (units, i) => units.night[i]!,
  placeOf: (key) => ({ ...nowhere, night: nightDate(key) }),
  // A night is one night by its nature; its clusters are its stations.
  minNights: 1,
};

/**
 * One regression with an indicator per cell in place of the intercept: every cell shares the receiver
 * offsets and their uncertainty. Adjusted p across the cells that speak (Benjamini and Hochberg). `all` are
 * the units, followed by those of common antennas, which are in no cell.
 */
export function comparisonCells(
  units: SelectedUnits,
  all: SelectedUnits,
  offsets: OffsetColumn[],
  clusters: Int32Array,
  layout: Layout,
  clustering: ComparisonQuestion['clustering'],
): CellWithError[] {
  const { rows, cell, keys } = layOut(units, layout);
  if (rows.length === 0) return [];
  const used = followedBy(rows, units.n, all.n);
  const whole = used.length === all.n;
  const cells = new Int32Array(used.length);
  cells.set(cell);
  const stationNights = whole ? clusters : used.map((i) => clusters[i]!);
  // The cells of one night have but one night: their own picture stays one-way.
  const { calls, nights: nightIds } =
    clustering === 'two-way' && layout.minNights > 1
      ? twoWays({ call: used.map((i) => all.call[i]!), night: used.map((i) => all.night[i]!) })
      : {};
  const fit = clusterRegression(
    {
      cells: inNoCell(cells, rows.length),
      cellCount: keys.length,
      columns: offsets.map((o) => (whole ? o.values : pick(o.values, used))),
    },
    whole ? all.differenceDb : pick(all.differenceDb, used),
    calls ?? stationNights,
    nightIds ? { secondClusters: nightIds } : {},
  );
  const nights = nightsPerCell(units, rows, cell, keys.length);
  // Evidence is counted in station-nights, whatever the ways of the errors.
  const evidence = calls ? clustersPerCell(stationNights, cell, keys.length) : null;
  const found = keys.map((key, index): CellWithError => {
    const c = fit.coefficients[index]!;
    const clusterCount = evidence ? evidence[index]! : c.clusters;
    const enough = clusterCount >= CELL_MIN_CLUSTERS && nights[index]! >= layout.minNights;
    const error = errorOfCell(c, clusterCount, fit);
    const own: ComparisonCell = {
      ...layout.placeOf(key),
      units: c.rows,
      clusters: clusterCount,
      nights: nights[index]!,
      estimateDb: c.estimate,
      intervalDb: error && [error.interval[0], error.interval[1]],
      p: error?.p ?? null,
      pAdjusted: null,
      speaks: enough && c.estimate !== null && error !== null,
      pooledDb: null,
      pooledIntervalDb: null,
    };
    return { cell: own, seDb: error?.se ?? null };
  });
  const speaking = found.map(({ cell: own }) => own).filter((c) => c.speaks && c.p !== null);
  const { adjusted } = benjaminiHochberg(speaking.map((c) => c.p!));
  speaking.forEach((c, k) => (c.pAdjusted = adjusted[k]!));
  return found;
}

/**
 * A cell rests on its own few clusters: their number, not that of the whole picture, gives its degrees of freedom
 * and its small-sample factor C/(C-1). With the picture's own, cells of 8 to 11 clusters held the truth 84 times in
 * 100 instead of 95 (docs/ground-truth.md). Two-way errors have a factor for each way and keep them.
 */
function errorOfCell(
  { estimate, se }: Coefficient,
  clusters: number,
  fit: ClusterRegressionResult,
): TResult | null {
  if (estimate === null || se === null || clusters < 2) return null;
  const own = clusters / (clusters - 1);
  const factor = fit.secondClusters === null ? own / (fit.clusters / (fit.clusters - 1)) : 1;
  return tResult(estimate, se * Math.sqrt(factor), Math.min(clusters - 1, fit.df), fit.level);
}

interface Cells {
  /** Units that fall into a cell, ascending. */
  rows: Int32Array;
  /** The cell of each of them, an index into `keys`. */
  cell: Int32Array;
  /** Keys of the cells that have units, ascending. */
  keys: number[];
}

/** Typed arrays throughout: this runs three times over every unit of a season for each answer. */
function layOut(units: SelectedUnits, layout: Layout): Cells {
  const rows = new Int32Array(units.n);
  const keyOfRow = new Int32Array(units.n);
  const known = new Map<number, number>();
  let n = 0;
  for (let i = 0; i < units.n; i++) {
    const key = layout.keyOf(units, i);
    if (key === null) continue;
    rows[n] = i;
    keyOfRow[n] = key;
    if (!known.has(key)) known.set(key, 0);
    n++;
  }
  const keys = [...known.keys()].sort((a, b) => a - b);
  keys.forEach((key, index) => known.set(key, index));
  return { rows: rows.subarray(0, n), cell: keyOfRow.subarray(0, n).map((key) => known.get(key)!), keys };
}

/** The rows, and after them all from `from` to `end`. */
function followedBy(rows: Int32Array, from: number, end: number): Int32Array {
  if (from === end) return rows;
  const used = new Int32Array(rows.length + end - from);
  used.set(rows);
  for (let i = from; i < end; i++) used[rows.length + i - from] = i;
  return used;
}

function pick(values: Float64Array, rows: Int32Array): Float64Array {
  const picked = new Float64Array(rows.length);
  for (let k = 0; k < rows.length; k++) picked[k] = values[rows[k]!]!;
  return picked;
}

/** Distinct clusters in each cell; `cell` belongs to the first of the cluster ids. */
function clustersPerCell(clusters: Int32Array, cell: Int32Array, cellCount: number): Int32Array {
  const counts = new Int32Array(cellCount);
  const seen = new Set<number>();
  cell.forEach((own, k) => {
    const key = clusters[k]! * cellCount + own;
    if (seen.has(key)) return;
    seen.add(key);
    counts[own]!++;
  });
  return counts;
}

/** Distinct nights in each cell, by one flag a cell and night. */
function nightsPerCell(
  units: SelectedUnits,
  rows: Int32Array,
  cell: Int32Array,
  cellCount: number,
): Int32Array {
  let first = Infinity;
  let last = -Infinity;
  for (const row of rows) {
    first = Math.min(first, units.night[row]!);
    last = Math.max(last, units.night[row]!);
  }
  const span = last - first + 1;
  const seen = new Uint8Array(cellCount * span);
  const nights = new Int32Array(cellCount);
  for (let k = 0; k < rows.length; k++) {
    const at = cell[k]! * span + units.night[rows[k]!]! - first;
    if (seen[at] === 1) continue;
    seen[at] = 1;
    nights[cell[k]!]!++;
  }
  return nights;
}
