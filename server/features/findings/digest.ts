import { createHash } from 'node:crypto';
import { selectHeardOnly, selectUnits } from '../../../shared/comparison/selection.ts';
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
 * database's ids have no part in but those of the two antennas:
 *
 *     whichwire finding 1 TAB antenna A TAB antenna B LF
 *     for each night in order:  night TAB date LF
 *       u TAB block start,call,band,kind,receiver on A,receiver on B TAB spots on A,spots on B,difference in dB LF
 *       h TAB call,band,side ("a" or "b") TAB how often LF
 *
 * Lines of a night are sorted by code unit, units first. Numbers are written as ECMAScript writes them
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
      night = { night: nightDate(index), units: new Map(), heardOnly: new Map(), digest: '' };
      nights.set(index, night);
    }
    return night;
  };
  const call = (id: number) => input.calls.get(id)?.call ?? `unknown call ${id}`;
  const receivers = new Map(input.receivers.map((r) => [r.id, r.callSign]));
  const receiver = (id: number) => receivers.get(id) ?? `receiver ${id}`;

  const { units } = selectUnits(input);
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
  return `night\t${night.night}\n${lines('u', night.units)}${lines('h', night.heardOnly)}`;
}

export function heardOnlyCount(night: NightLines): number {
  let count = 0;
  for (const times of night.heardOnly.values()) count += times;
  return count;
}
