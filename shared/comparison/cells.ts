import type { ComparisonCell } from '../contracts/comparison.ts';
import { nightDate } from '../radio/night.ts';
import { benjaminiHochberg, clusterRegression } from '../stats/index.ts';
import type { OffsetColumn } from './offsets.ts';
import { NO_HOUR, NO_SECTOR } from './selection.ts';
import type { SelectedUnits } from './selection.ts';

/** A cell speaks only with this much evidence (2.4, item 8 of the method). */
export const CELL_MIN_CLUSTERS = 8;
export const CELL_MIN_NIGHTS = 3;

type Place = Pick<ComparisonCell, 'bandMetres' | 'sector' | 'hour' | 'night'>;
const nowhere: Place = { bandMetres: null, sector: null, hour: null, night: null };

/** Which cell a unit falls into (null: none), under a key that sorts. */
interface Layout {
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
 * offsets and their uncertainty. Adjusted p across the cells that speak (Benjamini and Hochberg).
 */
export function comparisonCells(
  units: SelectedUnits,
  offsets: OffsetColumn[],
  clusters: Int32Array,
  layout: Layout,
): ComparisonCell[] {
  const rows: number[] = [];
  const keys: number[] = [];
  for (let i = 0; i < units.n; i++) {
    const key = layout.keyOf(units, i);
    if (key === null) continue;
    rows.push(i);
    keys.push(key);
  }
  if (rows.length === 0) return [];
  const sorted = [...new Set(keys)].sort((a, b) => a - b);
  const indexOf = new Map(sorted.map((key, index) => [key, index]));
  const cell = Int32Array.from(keys, (key) => indexOf.get(key)!);
  const whole = rows.length === units.n;
  const pick = (from: ArrayLike<number>) => Float64Array.from(rows, (i) => from[i]!);
  const fit = clusterRegression(
    {
      cells: cell,
      cellCount: sorted.length,
      columns: offsets.map((o) => (whole ? o.values : pick(o.values))),
    },
    whole ? units.differenceDb : pick(units.differenceDb),
    whole ? clusters : Int32Array.from(rows, (i) => clusters[i]!),
  );

  const nights = sorted.map(() => new Set<number>());
  rows.forEach((i, row) => nights[cell[row]!]!.add(units.night[i]!));
  const cells = sorted.map((key, index): ComparisonCell => {
    const c = fit.coefficients[index]!;
    const enough = c.clusters >= CELL_MIN_CLUSTERS && nights[index]!.size >= layout.minNights;
    return {
      ...layout.placeOf(key),
      units: c.rows,
      clusters: c.clusters,
      nights: nights[index]!.size,
      estimateDb: c.estimate,
      intervalDb: c.interval && [c.interval[0], c.interval[1]],
      p: c.p,
      pAdjusted: null,
      speaks: enough && c.estimate !== null && c.interval !== null,
    };
  });
  const speaking = cells.filter((c) => c.speaks && c.p !== null);
  const { adjusted } = benjaminiHochberg(speaking.map((c) => c.p!));
  speaking.forEach((c, k) => (c.pAdjusted = adjusted[k]!));
  return cells;
}
