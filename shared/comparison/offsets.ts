import type { SelectedUnits } from './selection.ts';

/** One dense column of the regression: how much more a receiver reports than the band's first receiver. */
export interface OffsetColumn {
  receiverId: number;
  /** The receiver that the others of the band are measured against: the lowest id. */
  againstReceiverId: number;
  bandMetres: number;
  values: Float64Array;
}

/** One exact number for a receiver on a band: text keys would cost more than the rest of the work. */
export const receiverOnBand = (receiverId: number, bandMetres: number) => bandMetres * 2 ** 31 + receiverId;

/**
 * The columns z of d = theta + sum of rho z, one per receiver and band but one: +1 where the receiver was
 * on A's side, -1 where it was on B's. Alternating units have one receiver
 * on both sides and need none.
 */
export function offsetColumns(units: SelectedUnits): OffsetColumn[] {
  const receiversOfBand = new Map<number, Set<number>>();
  for (let i = 0; i < units.n; i++) {
    if (units.alternating[i] === 1) continue;
    const set = receiversOfBand.get(units.band[i]!) ?? new Set<number>();
    set.add(units.receiverA[i]!).add(units.receiverB[i]!);
    receiversOfBand.set(units.band[i]!, set);
  }
  const columns: OffsetColumn[] = [];
  const columnOf = new Map<number, Float64Array>();
  for (const [bandMetres, receivers] of [...receiversOfBand].sort(([a], [b]) => a - b)) {
    const [first, ...others] = [...receivers].sort((a, b) => a - b);
    for (const receiverId of others) {
      const values = new Float64Array(units.n);
      columns.push({ receiverId, againstReceiverId: first!, bandMetres, values });
      columnOf.set(receiverOnBand(receiverId, bandMetres), values);
    }
  }
  for (let i = 0; i < units.n; i++) {
    if (units.alternating[i] === 1) continue;
    const onA = columnOf.get(receiverOnBand(units.receiverA[i]!, units.band[i]!));
    const onB = columnOf.get(receiverOnBand(units.receiverB[i]!, units.band[i]!));
    if (onA) onA[i]! += 1;
    if (onB) onB[i]! -= 1;
  }
  return columns;
}

/** Differences with the fitted receiver offsets taken out; the k-th rho belongs to the k-th column. */
export function withoutOffsets(
  units: SelectedUnits,
  columns: OffsetColumn[],
  rho: ArrayLike<number>,
): Float64Array {
  const corrected = Float64Array.from(units.differenceDb);
  columns.forEach((column, k) => {
    for (let i = 0; i < units.n; i++) corrected[i]! -= column.values[i]! * rho[k]!;
  });
  return corrected;
}
