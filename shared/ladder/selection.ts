import { BlockCalendar, NO_SECTOR, sectorLookup } from '../comparison/selection.ts';
import type { LadderAnswer } from '../contracts/ladder.ts';
import { ALTERNATING } from '../pairing/index.ts';
import type { LadderInput } from './input.ts';

/** The units of one band that the question asks for, as columns; one row a unit. */
export interface LadderUnits {
  n: number;
  antennaA: Int32Array;
  antennaB: Int32Array;
  receiverA: Int32Array;
  receiverB: Int32Array;
  /** dB, above zero when A hears better. */
  differenceDb: Float64Array;
  call: Int32Array;
  night: Int32Array;
  alternating: Uint8Array;
}

export interface LadderSelection {
  bandMetres: number | null;
  bands: LadderAnswer['bands'];
  units: LadderUnits;
  leftOut: LadderAnswer['leftOut'];
}

/** Two receivers on one antenna tell the receivers apart and compare no antennas: they count as no unit of a ladder. */
export function comparesAntennas(
  { antennaA, antennaB }: { antennaA: Int32Array; antennaB: Int32Array },
  i: number,
): boolean {
  return antennaA[i] !== antennaB[i];
}

/** Bands with units, longest wave first. */
function bandsOf(units: LadderInput['units']): LadderAnswer['bands'] {
  const { band } = units;
  const counts = new Map<number, number>();
  // Units of one band stand together for long: count runs, not rows.
  for (let from = 0; from < band.length;) {
    let to = from + 1;
    while (to < band.length && band[to] === band[from]) to++;
    let compared = 0;
    for (let i = from; i < to; i++) compared += Number(comparesAntennas(units, i));
    if (compared > 0) counts.set(band[from]!, (counts.get(band[from]!) ?? 0) + compared);
    from = to;
  }
  return [...counts]
    .map(([bandMetres, units]) => ({ bandMetres, units }))
    .sort((a, b) => b.bandMetres - a.bandMetres);
}

/**
 * Picks the units of the band (else of the band with most units) by the rules of a comparison: part of the
 * night, receivers, kinds and sectors. O(units).
 */
export function selectLadderUnits(input: LadderInput): LadderSelection {
  const { question, units } = input;
  const bands = bandsOf(units);
  const busiest = bands.reduce<(typeof bands)[number] | null>(
    (most, band) => (most && most.units >= band.units ? most : band),
    null,
  );
  const bandMetres = question.bandMetres ?? busiest?.bandMetres ?? null;
  const receivers = new Set(question.receivers);
  const sectors = new Set(question.sectors);
  const wants = (alternating: boolean) =>
    question.kinds.length === 0 || question.kinds.includes(alternating ? 'alternating' : 'simultaneous');
  const [wantAlternating, wantSimultaneous] = [wants(true), wants(false)];
  const calendar = new BlockCalendar({
    question: { hours: question.hours, hourBasis: 'utc' },
    station: input.station,
  });
  const sectorOfCall = sectorLookup(input);
  const leftOut: LadderAnswer['leftOut'] = {
    outsideHoursUnits: 0,
    otherReceiverUnits: 0,
    otherKindUnits: 0,
    bearingUnsureUnits: 0,
    otherSectorUnits: 0,
  };
  const rows = new Int32Array(units.call.length);
  const night = new Int32Array(units.call.length);
  let n = 0;
  for (let i = 0; i < units.call.length; i++) {
    if (units.band[i] !== bandMetres) continue;
    const counted = Number(comparesAntennas(units, i));
    const block = calendar.at(units.blockMinute[i]!);
    if (!block.inHours) {
      leftOut.outsideHoursUnits += counted;
      continue;
    }
    if (receivers.size > 0 && !(receivers.has(units.receiverA[i]!) && receivers.has(units.receiverB[i]!))) {
      leftOut.otherReceiverUnits += counted;
      continue;
    }
    if (units.kind[i] === ALTERNATING ? !wantAlternating : !wantSimultaneous) {
      leftOut.otherKindUnits += counted;
      continue;
    }
    const sector = sectorOfCall(units.call[i]!);
    if (sector === NO_SECTOR) leftOut.bearingUnsureUnits += counted;
    if (sectors.size > 0 && !sectors.has(sector)) {
      if (sector !== NO_SECTOR) leftOut.otherSectorUnits += counted;
      continue;
    }
    rows[n] = i;
    night[n] = block.night;
    n++;
  }
  const chosen = rows.subarray(0, n);
  return {
    ...{ bandMetres, bands, leftOut },
    units: {
      n,
      antennaA: chosen.map((i) => units.antennaA[i]!),
      antennaB: chosen.map((i) => units.antennaB[i]!),
      receiverA: chosen.map((i) => units.receiverA[i]!),
      receiverB: chosen.map((i) => units.receiverB[i]!),
      differenceDb: Float64Array.from(chosen, (i) => units.differenceDb[i]!),
      call: chosen.map((i) => units.call[i]!),
      night: night.slice(0, n),
      alternating: Uint8Array.from(chosen, (i) => Number(units.kind[i] === ALTERNATING)),
    },
  };
}
