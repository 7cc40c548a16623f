import type { ComparisonAnswer } from '../contracts/comparison.ts';
import type { ComparisonInput } from './input.ts';
import type { SelectedHeardOnly } from './heard-only-selection.ts';
import type { SelectedUnits } from './selection.ts';

type StationRow = ComparisonAnswer['stations'][number];

/** One row a station, most units first; differences with the receiver offsets taken out. */
export function stationRows(
  input: ComparisonInput,
  units: SelectedUnits,
  correctedDb: Float64Array,
  heardOnly: SelectedHeardOnly,
): StationRow[] {
  const rows = new Map<
    number,
    { units: number; sum: number; nights: Set<number>; onlyA: number; onlyB: number }
  >();
  const of = (call: number) => {
    let row = rows.get(call);
    if (!row) rows.set(call, (row = { units: 0, sum: 0, nights: new Set(), onlyA: 0, onlyB: 0 }));
    return row;
  };
  for (let i = 0; i < units.n; i++) {
    const row = of(units.call[i]!);
    row.units++;
    row.sum += correctedDb[i]!;
    row.nights.add(units.night[i]!);
  }
  for (let i = 0; i < heardOnly.n; i++) {
    const row = rows.get(heardOnly.call[i]!);
    if (!row) continue;
    if (heardOnly.side[i]! > 0) row.onlyA++;
    else row.onlyB++;
  }
  return [...rows]
    .map(([id, row]): StationRow => {
      const facts = input.calls.get(id);
      return {
        call: facts?.call ?? `call ${id}`,
        country: facts?.country ?? null,
        azimuthDeg: facts?.azimuthDeg ?? null,
        distanceKm: facts?.distanceKm ?? null,
        units: row.units,
        nights: row.nights.size,
        meanDb: row.sum / row.units,
        onlyA: row.onlyA,
        onlyB: row.onlyB,
      };
    })
    .sort((a, b) => b.units - a.units || (a.call < b.call ? -1 : 1));
}

/** Bars of whole decibels (two where the range is wide), covering every difference and aligned to zero. */
export function histogram(correctedDb: Float64Array): ComparisonAnswer['histogram'] {
  if (correctedDb.length === 0) return { binWidthDb: 1, bins: [] };
  let low = Infinity;
  let high = -Infinity;
  for (const d of correctedDb) {
    if (d < low) low = d;
    if (d > high) high = d;
  }
  const binWidthDb = high - low > 40 ? 2 : 1;
  // Bars are centred on multiples of the width, so that zero has a bar of its own.
  const indexOf = (d: number) => Math.floor(d / binWidthDb + 0.5);
  const first = indexOf(low);
  const counts = new Array<number>(indexOf(high) - first + 1).fill(0);
  for (const d of correctedDb) counts[indexOf(d) - first]!++;
  return { binWidthDb, bins: counts.map((n, k) => ({ fromDb: (first + k - 0.5) * binWidthDb, units: n })) };
}
