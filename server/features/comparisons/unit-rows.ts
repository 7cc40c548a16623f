import { selectUnits } from '../../../shared/comparison/index.ts';
import type { ComparisonInput } from '../../../shared/comparison/index.ts';
import { nightDate } from '../../../shared/radio/night.ts';

export const unitRowsHeader = [
  ...['block_start_utc', 'night', 'call', 'band_m', 'kind', 'receiver_a', 'receiver_b', 'spots_a', 'spots_b'],
  ...['difference_db', 'azimuth_deg', 'sector', 'country'],
];

/** The units behind an answer, one row each, as the estimate used them (receiver offsets still in). */
export function* unitRows(input: ComparisonInput): Generator<(string | number | null)[]> {
  const { units } = selectUnits(input);
  const receiverName = new Map(input.receivers.map((r) => [r.id, r.callSign]));
  for (let i = 0; i < units.n; i++) {
    const call = input.calls.get(units.call[i]!);
    yield [
      new Date(units.blockMinute[i]! * 60_000).toISOString(),
      nightDate(units.night[i]!),
      call?.call ?? null,
      units.band[i]!,
      units.alternating[i] === 1 ? 'alternating' : 'simultaneous',
      receiverName.get(units.receiverA[i]!) ?? null,
      receiverName.get(units.receiverB[i]!) ?? null,
      units.countA[i]!,
      units.countB[i]!,
      units.differenceDb[i]!,
      call?.azimuthDeg ?? null,
      units.sector[i]! < 0 ? null : units.sector[i]!,
      call?.country ?? null,
    ];
  }
}
