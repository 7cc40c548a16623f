import type { ComparisonAnswer } from '../contracts/comparison.ts';
import { benjaminiHochberg, clusterIds, majorityByCluster, mcnemar } from '../stats/index.ts';
import type { ComparisonInput } from './input.ts';
import { NO_SECTOR } from './selection.ts';
import type { SelectedHeardOnly } from './heard-only-selection.ts';
import type { LeftOut, SelectedUnits } from './selection.ts';

type Fairness = ComparisonAnswer['fairness'];

/** Key of the cluster (call sign, night): ids and nights are both small enough to share one exact number. */
export function clusterKeys(rows: { call: Int32Array; night: Int32Array }): number[] {
  return Array.from(rows.call, (call, i) => call * 1_000_000 + rows.night[i]!);
}

/** Spots left out before units were made, over the nights asked for, on the two antennas and bands asked for. */
export function countExclusions(input: ComparisonInput, leftOut: LeftOut): Fairness['exclusions'] {
  const { question } = input;
  const bands = new Set(question.bandsMetres);
  const receivers = new Set(question.receivers);
  let guardedSpots = 0;
  let untaggedSpots = 0;
  let doubledSpots = 0;
  for (const night of input.nights) {
    doubledSpots += night.doubles;
    for (const row of night.spots) {
      if (bands.size > 0 && !bands.has(row.band)) continue;
      if (receivers.size > 0 && !receivers.has(row.receiver)) continue;
      untaggedSpots += row.untagged;
      if (row.antenna === question.antennaA || row.antenna === question.antennaB) guardedSpots += row.guarded;
    }
  }
  return { guardedSpots, untaggedSpots, doubledSpots, ...leftOut };
}

export function listeningHours(input: ComparisonInput): Fairness['listening'] {
  const hoursOn = (antenna: number) =>
    input.nights
      .flatMap((night) => night.listening)
      .filter((row) => row.antenna === antenna)
      .reduce((sum, row) => sum + row.seconds, 0) / 3600;
  return { aHours: hoursOn(input.question.antennaA), bHours: hoursOn(input.question.antennaB) };
}

export function receiverBalance(units: SelectedUnits): Fairness['receiverBalance'] {
  const counts = new Map<number, { unitsOnA: number; unitsOnB: number }>();
  const of = (id: number) => {
    const found = counts.get(id) ?? { unitsOnA: 0, unitsOnB: 0 };
    counts.set(id, found);
    return found;
  };
  for (let i = 0; i < units.n; i++) {
    of(units.receiverA[i]!).unitsOnA++;
    of(units.receiverB[i]!).unitsOnB++;
  }
  return [...counts].sort(([a], [b]) => a - b).map(([receiverId, c]) => ({ receiverId, ...c }));
}

/** McNemar on stations heard on one antenna only, each (call sign, night) counted once by its majority. */
export function heardOnlyTest(heardOnly: SelectedHeardOnly): Fairness['heardOnly'] {
  if (heardOnly.n === 0) return null;
  const onA = heardOnly.side.reduce((sum, side) => sum + (side > 0 ? 1 : 0), 0);
  const { ids } = clusterIds(clusterKeys(heardOnly));
  const majority = majorityByCluster(heardOnly.side, ids);
  const test = mcnemar(majority.onlyA, majority.onlyB);
  return {
    onA,
    onB: heardOnly.n - onA,
    stationsOnlyA: majority.onlyA,
    stationsOnlyB: majority.onlyB,
    oddsRatio: test.oddsRatio,
    oddsRatioInterval: test.interval,
    exactP: test.n === 0 ? null : test.p,
    midP: test.n === 0 ? null : test.midP,
  };
}

/** The same by sector, adjusted across the sectors (Benjamini and Hochberg). Sectors without any are left out. */
export function heardOnlyBySector(heardOnly: SelectedHeardOnly): ComparisonAnswer['heardOnlySectors'] {
  const rowsOf = new Map<number, number[]>();
  for (let i = 0; i < heardOnly.n; i++) {
    const sector = heardOnly.sector[i]!;
    if (sector === NO_SECTOR) continue;
    const rows = rowsOf.get(sector);
    if (rows) rows.push(i);
    else rowsOf.set(sector, [i]);
  }
  const keys = clusterKeys(heardOnly);
  const sectors = [...rowsOf]
    .sort(([p], [q]) => p - q)
    .map(([sector, rows]) => {
      const { onlyA, onlyB } = majorityByCluster(
        rows.map((i) => heardOnly.side[i]!),
        clusterIds(rows.map((i) => keys[i]!)).ids,
      );
      return { sector, test: mcnemar(onlyA, onlyB) };
    });
  const decided = sectors.filter(({ test }) => test.n > 0);
  const { adjusted } = benjaminiHochberg(decided.map(({ test }) => test.midP));
  return sectors.map(({ sector, test }) => ({
    sector,
    onlyA: test.onlyA,
    onlyB: test.onlyB,
    oddsRatio: test.oddsRatio,
    intervalRatio: test.interval,
    midP: test.n === 0 ? null : test.midP,
    pAdjusted: test.n === 0 ? null : adjusted[decided.findIndex((d) => d.sector === sector)]!,
  }));
}

/** The fewest stations that together hold half of the units: a small number means that few decide. */
export function halfWeightStations(unitsPerStation: number[]): number {
  const half = unitsPerStation.reduce((sum, n) => sum + n, 0) / 2;
  let held = 0;
  let stations = 0;
  for (const n of [...unitsPerStation].sort((a, b) => b - a)) {
    if (held >= half) break;
    held += n;
    stations++;
  }
  return stations;
}

/** How thin the evidence is, in sentences. The thresholds are the method's (2.4, item 1). */
export function thinEvidence(
  clusters: number,
  nights: number,
  halfWeight: number,
  stations: number,
): string[] {
  const warnings: string[] = [];
  if (nights > 0 && nights < 10) {
    warnings.push(
      `Only ${nights} ${nights === 1 ? 'night carries' : 'nights carry'} this answer; ten or more are safer.`,
    );
  }
  if (clusters > 0 && clusters < 20) {
    warnings.push(
      `Only ${clusters} ${clusters === 1 ? 'station-night carries' : 'station-nights carry'} this answer; twenty or more are safer.`,
    );
  }
  if (stations >= 8 && halfWeight <= 3) {
    warnings.push(`${halfWeight} of ${stations} stations hold half of the units: a few strong ones decide.`);
  }
  return warnings;
}
