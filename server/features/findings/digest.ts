import { createHash } from 'node:crypto';
import { selectCommonAntenna } from '../../../shared/comparison/common-antenna.ts';
import { selectHeardOnly } from '../../../shared/comparison/heard-only-selection.ts';
import { selectUnits } from '../../../shared/comparison/selection.ts';
import type { ComparisonInput } from '../../../shared/comparison/index.ts';
import { nightDate } from '../../../shared/radio/night.ts';
import { compareText } from './evidence.ts';

/** What one night contributes, a line each, sorted. */
export interface NightLines {
  night: string;
  /** "2026-11-30T18:15:00.000Z,EA8QSH,160,simultaneous,EI7QSA,EI7QSC" -> "4,4,-1.25". */
  units: Map<string, string>;
  /** "EA8QSH,160,a" -> how often. */
  heardOnly: Map<string, number>;
  /** Two receivers on one antenna: "2026-11-30T18:15:00.000Z,EA8QSH,160,EI7QSA,EI7QSC,3" -> "2,-1.5". */
  common: Map<string, string>;
  digest: string;
}

export interface Digest {
  /** SHA-256, hexadecimal. */
  digest: string;
  nights: NightLines[];
}

const version = 'whichwire finding 1';

/**
 * SHA-256 over the units and heard-only stations that an answer uses, night by night, in a text that a
 * database's ids have no part in but those of antennas:
 *
 *     whichwire finding 1 TAB antenna A TAB antenna B LF
 *     for each night in order:  night TAB date LF
 *       u TAB block start,call,band,kind,receiver on A,receiver on B TAB spots on A,spots on B,difference in dB LF
 *       h TAB call,band,side ("a" or "b") TAB how often LF
 *       c TAB block start,call,band,receiver,receiver,antenna TAB matches,difference in dB LF
 *
 * Lines of a night are sorted by code unit, units first, then heard-only (h), then two receivers on one antenna (c). Numbers are written as ECMAScript writes them
 * (shortest text that reads back to the same number). A night's own digest is over its own lines.
 */
export function digestOf(input: ComparisonInput): Digest {
  const nights = collect(input);
  const { antennas } = input;
  const whole = createHash('sha256').update(`${version}\t${antennas.a.id}\t${antennas.b.id}\n`);
  for (const night of nights) {
    const text = textOf(night);
    whole.update(text);
    night.digest = createHash('sha256').update(text).digest('hex');
  }
  return { digest: whole.digest('hex'), nights };
}

function collect(input: ComparisonInput): NightLines[] {
  const nights = new Map<number, NightLines>();
  const of = (index: number) => {
    let night = nights.get(index);
    if (!night) {
      night = {
        night: nightDate(index),
        units: new Map(),
        heardOnly: new Map(),
        common: new Map(),
        digest: '',
      };
      nights.set(index, night);
    }
    return night;
  };
  const call = (id: number) => input.calls.get(id)?.call ?? `unknown call ${id}`;
  const receivers = new Map(input.receivers.map((r) => [r.id, r.callSign]));
  const receiver = (id: number) => receivers.get(id) ?? `receiver ${id}`;

  const { units } = selectUnits(input);
  const common = selectCommonAntenna(input, units);
  for (let i = 0; i < common.n; i++) {
    const key = [
      new Date(common.blockMinute[i]! * 60_000).toISOString(),
      call(common.call[i]!),
      common.band[i]!,
      receiver(common.receiverA[i]!),
      receiver(common.receiverB[i]!),
      common.antenna[i]!,
    ].join();
    of(common.night[i]!).common.set(key, `${common.countA[i]},${common.differenceDb[i]}`);
  }
  for (let i = 0; i < units.n; i++) {
    const key = [
      new Date(units.blockMinute[i]! * 60_000).toISOString(),
      call(units.call[i]!),
      units.band[i]!,
      units.alternating[i] === 1 ? 'alternating' : 'simultaneous',
      receiver(units.receiverA[i]!),
      receiver(units.receiverB[i]!),
    ].join();
    const values = `${units.countA[i]},${units.countB[i]},${units.differenceDb[i]}`;
    of(units.night[i]!).units.set(key, values);
  }
  const heardOnly = selectHeardOnly(input);
  for (let i = 0; i < heardOnly.n; i++) {
    const key = `${call(heardOnly.call[i]!)},${heardOnly.band[i]},${heardOnly.side[i]! > 0 ? 'a' : 'b'}`;
    const counts = of(heardOnly.night[i]!).heardOnly;
    counts.set(key, (counts.get(key) ?? 0) + 1);
  }
  return [...nights].sort(([a], [b]) => a - b).map(([, night]) => night);
}

function textOf(night: NightLines): string {
  const lines = (letter: string, rows: Map<string, string | number>) =>
    [...rows]
      .sort(([a], [b]) => compareText(a, b))
      .map(([key, value]) => `${letter}\t${key}\t${value}\n`)
      .join('');
  return `night\t${night.night}\n${lines('u', night.units)}${lines('h', night.heardOnly)}${lines('c', night.common)}`;
}

export function heardOnlyCount(night: NightLines): number {
  let count = 0;
  for (const times of night.heardOnly.values()) count += times;
  return count;
}
