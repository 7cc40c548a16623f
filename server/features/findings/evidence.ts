import type { CallFacts, ComparisonInput } from '../../../shared/comparison/index.ts';

/** A dwell `[startMs, endMs)` as a finding keeps it, cut to the nights of the finding. */
export interface FrozenDwell {
  id: number;
  receiverId: number;
  receiver: string;
  antennaId: number;
  antenna: string;
  startMs: number;
  endMs: number;
}

/** Everything that an answer was computed from, and the switch log behind it. */
export interface Evidence {
  input: ComparisonInput;
  dwells: FrozenDwell[];
}

type Columns = Record<string, ArrayLike<number> & { map: (f: (v: number, i: number) => number) => unknown }>;

/**
 * The same evidence in one fixed order: calls numbered by their text, rows by block, call, band, kind and
 * receivers. Sums of floating-point numbers depend on their order; in this one the same data give the same
 * numbers to the last bit, whatever order and ids the database gave them. O(n log n).
 */
export function canonical(input: ComparisonInput): ComparisonInput {
  const used = new Set<number>();
  for (const call of input.units.call) used.add(call);
  for (const call of input.heardOnly.call) used.add(call);
  const textOf = (id: number) => input.calls.get(id)?.call ?? `unknown call ${id}`;
  const byText = [...used].sort((a, b) => compareText(textOf(a), textOf(b)));
  const numberOf = new Map(byText.map((id, index) => [id, index]));
  const receiverRank = new Map(
    [...input.receivers]
      .sort((a, b) => compareText(a.callSign, b.callSign))
      .map((receiver, index) => [receiver.id, index]),
  );
  const rank = (id: number) => receiverRank.get(id) ?? -1;

  function ordered<T extends ComparisonInput['units'] | ComparisonInput['heardOnly']>(
    columns: T,
    kind: ArrayLike<number>,
  ): T {
    const { antennaA, antennaB, blockMinute, call, band, receiverA, receiverB } = columns;
    const number = Int32Array.from(call, (id) => numberOf.get(id)!);
    const order = Uint32Array.from(call, (_id, i) => i).sort(
      (i, j) =>
        blockMinute[i]! - blockMinute[j]! ||
        number[i]! - number[j]! ||
        band[i]! - band[j]! ||
        kind[i]! - kind[j]! ||
        rank(receiverA[i]!) - rank(receiverA[j]!) ||
        rank(receiverB[i]!) - rank(receiverB[j]!) ||
        antennaA[i]! - antennaA[j]! ||
        antennaB[i]! - antennaB[j]!,
    );
    const sorted = Object.entries({ ...columns, call: number } as unknown as Columns).map(
      ([name, values]) => [name, values.map((_value, i) => values[order[i]!]!)],
    );
    return Object.fromEntries(sorted) as unknown as T;
  }

  return {
    ...input,
    units: ordered(input.units, input.units.kind),
    heardOnly: ordered(input.heardOnly, input.heardOnly.side),
    calls: new Map(byText.map((id, index) => [index, input.calls.get(id) ?? unknownCall(textOf(id))])),
  };
}

function unknownCall(call: string): CallFacts {
  return { call, country: null, azimuthDeg: null, spreadDeg: null, distanceKm: null };
}

/** By code unit, the same on every machine: a locale's order may change with its library. */
export function compareText(a: string, b: string): number {
  return a < b ? -1 : a > b ? 1 : 0;
}
