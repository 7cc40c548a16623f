import { ALTERNATING } from '../pairing/index.ts';
import type { ComparisonInput } from './input.ts';
import { BlockCalendar, cut, emptySelection, NO_HOUR, NO_SECTOR } from './selection.ts';
import type { SelectedUnits } from './selection.ts';

export interface CommonAntennaUnits extends SelectedUnits {
  antenna: Int32Array;
}

/**
 * Units that two receivers on one antenna made, on the bands and by the receivers of the question: they measure
 * nothing but the receivers' offsets (2.3 of the method). Directions and hours do not matter to a receiver.
 */
export function selectCommonAntenna(input: ComparisonInput, units: SelectedUnits): CommonAntennaUnits {
  const { question, units: all } = input;
  const bands = new Set(units.band);
  const receivers = new Set(question.receivers);
  const calendar = new BlockCalendar(input);
  const wanted: number[] = [];
  for (let i = 0; i < all.call.length; i++) {
    if (all.antennaA[i] !== all.antennaB[i] || all.kind[i] === ALTERNATING || !bands.has(all.band[i]!))
      continue;
    if (receivers.size > 0 && !(receivers.has(all.receiverA[i]!) && receivers.has(all.receiverB[i]!)))
      continue;
    wanted.push(i);
  }
  const out = emptySelection(wanted.length);
  wanted.forEach((i, k) => {
    out.differenceDb[k] = all.differenceDb[i]!;
    out.call[k] = all.call[i]!;
    out.band[k] = all.band[i]!;
    out.night[k] = calendar.at(all.blockMinute[i]!).night;
    out.blockMinute[k] = all.blockMinute[i]!;
    out.receiverA[k] = all.receiverA[i]!;
    out.receiverB[k] = all.receiverB[i]!;
    out.countA[k] = all.countA[i]!;
    out.countB[k] = all.countB[i]!;
    out.sector[k] = NO_SECTOR;
    out.hour[k] = NO_HOUR;
  });
  return { ...cut(out, wanted.length), antenna: Int32Array.from(wanted, (i) => all.antennaA[i]!) };
}

/** The units of the question, followed by those of common antennas: what one regression is fitted to. */
export function withCommonAntenna(units: SelectedUnits, common: SelectedUnits): SelectedUnits {
  if (common.n === 0) return units;
  const n = units.n + common.n;
  const joined = emptySelection(n);
  for (const name of Object.keys(joined) as (keyof typeof joined)[]) {
    joined[name].set(units[name]);
    joined[name].set(common[name], units.n);
  }
  return cut(joined, n);
}

/** Rows from the given one on are in no cell: the difference of the antennas has no part in them. */
export function inNoCell(cells: Int32Array, from: number): Int32Array {
  return cells.fill(-1, from);
}
