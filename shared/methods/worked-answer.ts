/** Twelve units of three stations in three nights, and their eight station-nights: most examples of answers are these. */
import { formatDb } from '../format.ts';
import { clusterIds, clusterMean } from '../stats/index.ts';
import { clusterMeans } from '../comparison/cluster-means.ts';
import type { ExampleTable } from './method-entry.ts';

export interface ExampleUnit {
  call: string;
  night: string;
  db: number;
}

const rows: readonly (readonly [call: string, night: string, ...db: number[]])[] = [
  ['EA8QSH', '14 Nov', 3, 4, 3.5],
  ['EA8QSH', '15 Nov', 1],
  ['EA8QSH', '16 Nov', 2],
  ['K1QRB', '14 Nov', 2, 1],
  ['K1QRB', '15 Nov', 2.5],
  ['K1QRB', '16 Nov', 0],
  ['UA9QSM', '14 Nov', 1.5],
  ['UA9QSM', '15 Nov', 3, 2],
];

export const exampleUnits: readonly ExampleUnit[] = rows.flatMap(([call, night, ...values]) =>
  values.map((db) => ({ call, night, db })),
);
export const exampleDb = exampleUnits.map(({ db }) => db);
export const exampleClusters = clusterIds(exampleUnits.map(({ call, night }) => `${call} ${night}`));
export const exampleCalls = clusterIds(exampleUnits.map(({ call }) => call));
export const exampleNights = clusterIds(exampleUnits.map(({ night }) => night));

/** One row a station-night. */
export function unitsTable(): ExampleTable {
  return {
    caption: 'Twelve units of eight station-nights, dB',
    head: ['Call', 'Night', 'Units'],
    rows: rows.map(([call, night, ...values]) => [
      call,
      night,
      values.map((db) => formatDb(db).replace(/.dB$/, '')).join(', '),
    ]),
  };
}

export const exampleFit = () => clusterMean(exampleDb, exampleClusters.ids);

/** The means of the eight station-nights. */
export const exampleMeans = (): number[] => [
  ...clusterMeans(Float64Array.from(exampleDb), exampleClusters.ids, exampleClusters.count),
];

export function meansTable(): ExampleTable {
  return {
    caption: 'The means of the eight station-nights',
    head: ['Call', 'Night', 'Mean'],
    rows: exampleMeans().map((db, k) => [rows[k]![0], rows[k]![1], formatDb(db, 2)]),
  };
}

/** Small p as a limit, never as zero; three decimals otherwise. */
export const pWords = (p: number | null): string =>
  p === null ? 'not known' : p < 0.001 ? 'below 0.001' : p.toFixed(3);
