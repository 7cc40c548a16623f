import type { HourMark, HourRange } from '../contracts/comparison.ts';
import { ALTERNATING } from '../pairing/index.ts';
import { sectorOf, sectorUnsure } from '../radio/geodesic.ts';
import { nightEndMs, nightIndexOf, nightStartMs } from '../radio/night.ts';
import { StationNights } from '../radio/sun.ts';
import type { ComparisonInput } from './input.ts';

/** Sector of a unit whose bearing is not known well enough. */
export const NO_SECTOR = -1;
/** Hour of a unit in a night without that sunset or sunrise. */
export const NO_HOUR = -128;

/** The units that answer the question, as columns; one row a unit. */
export interface SelectedUnits {
  n: number;
  /** dB, above zero when A hears better: turned round where the question names the antennas the other way. */
  differenceDb: Float64Array;
  call: Int32Array;
  band: Int16Array;
  night: Int32Array;
  blockMinute: Int32Array;
  /** Receiver on A's and on B's side; the same one in an alternating unit. */
  receiverA: Int32Array;
  receiverB: Int32Array;
  alternating: Uint8Array;
  countA: Uint16Array;
  countB: Uint16Array;
  sector: Int16Array;
  /** Whole hours on the question's basis: of the UTC day, or since sunset or sunrise. */
  hour: Int16Array;
}

export interface LeftOut {
  bearingUnsureUnits: number;
  outsideHoursUnits: number;
  otherReceiverUnits: number;
  otherKindUnits: number;
}

interface BlockFacts {
  night: number;
  inHours: boolean;
  hour: number;
}

/** Answers "which night, which hour, inside the hours asked for" once per block instead of once per unit. */
export class BlockCalendar {
  private readonly facts = new Map<number, BlockFacts>();
  private readonly nights: StationNights;
  private readonly longitude: number;

  constructor(
    private readonly input: {
      question: Pick<ComparisonInput['question'], 'hours' | 'hourBasis'>;
      station: ComparisonInput['station'];
    },
  ) {
    this.nights = new StationNights(input.station);
    this.longitude = input.station.longitude;
  }

  at(blockMinute: number): BlockFacts {
    let facts = this.facts.get(blockMinute);
    if (!facts) {
      const timeMs = blockMinute * 60_000;
      const night = nightIndexOf(timeMs, this.longitude);
      facts = {
        night,
        inHours:
          this.input.question.hours === null || this.isInside(timeMs, night, this.input.question.hours),
        hour: this.hourOf(timeMs, night),
      };
      this.facts.set(blockMinute, facts);
    }
    return facts;
  }

  private hourOf(timeMs: number, night: number): number {
    const { hourBasis } = this.input.question;
    if (hourBasis === 'utc') return new Date(timeMs).getUTCHours();
    const sun = this.nights.night(night);
    const zero = hourBasis === 'sunset' ? sun.sunsetMs : sun.sunriseMs;
    return zero === null ? NO_HOUR : Math.floor((timeMs - zero) / 3_600_000);
  }

  /**
   * Half-open. Both marks are turned into instants of the block's own night; when "from" then comes after
   * "to" (10 to 14 h UTC where the night starts at noon) the range wraps round the night's ends.
   */
  private isInside(timeMs: number, night: number, range: HourRange): boolean {
    const from = this.markMs(range.from, night);
    const to = this.markMs(range.to, night);
    if (from === null || to === null) return false;
    if (from === to) return range.from.reference === 'utc' && range.from.hours !== range.to.hours;
    return from < to ? timeMs >= from && timeMs < to : timeMs >= from || timeMs < to;
  }

  private markMs(mark: HourMark, night: number): number | null {
    if (mark.reference !== 'utc') {
      const sun = this.nights.night(night);
      const zero = mark.reference === 'sunset' ? sun.sunsetMs : sun.sunriseMs;
      return zero === null ? null : zero + mark.hours * 3_600_000;
    }
    const start = nightStartMs(night, this.longitude);
    const dayMs = 86_400_000;
    const ofDay = (((mark.hours * 3_600_000) % dayMs) + dayMs) % dayMs;
    const sinceStart = (ofDay - (start % dayMs) + 2 * dayMs) % dayMs;
    return Math.min(start + sinceStart, nightEndMs(night, this.longitude));
  }
}

/** The sector of each call, `NO_SECTOR` where it is not sure; worked out once per call. */
export function sectorLookup(
  input: Pick<ComparisonInput, 'calls' | 'sectorCount'>,
): (call: number) => number {
  const known = new Map<number, number>();
  return (call) => {
    let sector = known.get(call);
    if (sector === undefined) {
      const facts = input.calls.get(call);
      const usable =
        facts &&
        facts.azimuthDeg !== null &&
        facts.spreadDeg !== null &&
        !sectorUnsure(facts.spreadDeg, input.sectorCount);
      sector = usable ? sectorOf(facts.azimuthDeg ?? 0, input.sectorCount) : NO_SECTOR;
      known.set(call, sector);
    }
    return sector;
  };
}

/** Picks the units that the question asks for, and counts those left out by the first reason that applies. */
export function selectUnits(input: ComparisonInput): { units: SelectedUnits; leftOut: LeftOut } {
  const { question, units } = input;
  const bands = new Set(question.bandsMetres);
  const receivers = new Set(question.receivers);
  const sectors = new Set(question.sectors);
  const wantAlternating = question.kinds.length === 0 || question.kinds.includes('alternating');
  const wantSimultaneous = question.kinds.length === 0 || question.kinds.includes('simultaneous');
  const calendar = new BlockCalendar(input);
  const sectorOfCall = sectorLookup(input);
  const sign = question.antennaA < question.antennaB ? 1 : -1;
  const leftOut: LeftOut = {
    bearingUnsureUnits: 0,
    outsideHoursUnits: 0,
    otherReceiverUnits: 0,
    otherKindUnits: 0,
  };
  const out = emptySelection(units.call.length);
  let n = 0;

  for (let i = 0; i < units.call.length; i++) {
    if (units.antennaA[i] === units.antennaB[i]) continue;
    if (bands.size > 0 && !bands.has(units.band[i]!)) continue;
    const block = calendar.at(units.blockMinute[i]!);
    if (!block.inHours) {
      leftOut.outsideHoursUnits++;
      continue;
    }
    if (receivers.size > 0 && !(receivers.has(units.receiverA[i]!) && receivers.has(units.receiverB[i]!))) {
      leftOut.otherReceiverUnits++;
      continue;
    }
    const isAlternating = units.kind[i] === ALTERNATING;
    if (isAlternating ? !wantAlternating : !wantSimultaneous) {
      leftOut.otherKindUnits++;
      continue;
    }
    const sector = sectorOfCall(units.call[i]!);
    if (sector === NO_SECTOR) leftOut.bearingUnsureUnits++;
    if (sectors.size > 0 && !sectors.has(sector)) continue;

    out.differenceDb[n] = sign * units.differenceDb[i]!;
    out.call[n] = units.call[i]!;
    out.band[n] = units.band[i]!;
    out.night[n] = block.night;
    out.blockMinute[n] = units.blockMinute[i]!;
    out.receiverA[n] = sign > 0 ? units.receiverA[i]! : units.receiverB[i]!;
    out.receiverB[n] = sign > 0 ? units.receiverB[i]! : units.receiverA[i]!;
    out.alternating[n] = isAlternating ? 1 : 0;
    out.countA[n] = sign > 0 ? units.countA[i]! : units.countB[i]!;
    out.countB[n] = sign > 0 ? units.countB[i]! : units.countA[i]!;
    out.sector[n] = sector;
    out.hour[n] = block.hour;
    n++;
  }
  return { units: cut(out, n), leftOut };
}

/** The rows that are wanted, as a selection of their own. */
export function keepUnits(units: SelectedUnits, wanted: (row: number) => boolean): SelectedUnits {
  const out = emptySelection(units.n);
  const names = Object.keys(out) as (keyof typeof out)[];
  let n = 0;
  for (let i = 0; i < units.n; i++) {
    if (!wanted(i)) continue;
    for (const name of names) out[name][n] = units[name][i]!;
    n++;
  }
  return cut(out, n);
}

export function emptySelection(size: number): Omit<SelectedUnits, 'n'> {
  return {
    differenceDb: new Float64Array(size),
    call: new Int32Array(size),
    band: new Int16Array(size),
    night: new Int32Array(size),
    blockMinute: new Int32Array(size),
    receiverA: new Int32Array(size),
    receiverB: new Int32Array(size),
    alternating: new Uint8Array(size),
    countA: new Uint16Array(size),
    countB: new Uint16Array(size),
    sector: new Int16Array(size),
    hour: new Int16Array(size),
  };
}

export function cut(columns: Omit<SelectedUnits, 'n'>, n: number): SelectedUnits {
  const c = columns;
  return {
    n,
    differenceDb: c.differenceDb.subarray(0, n),
    call: c.call.subarray(0, n),
    band: c.band.subarray(0, n),
    night: c.night.subarray(0, n),
    blockMinute: c.blockMinute.subarray(0, n),
    receiverA: c.receiverA.subarray(0, n),
    receiverB: c.receiverB.subarray(0, n),
    alternating: c.alternating.subarray(0, n),
    countA: c.countA.subarray(0, n),
    countB: c.countB.subarray(0, n),
    sector: c.sector.subarray(0, n),
    hour: c.hour.subarray(0, n),
  };
}
