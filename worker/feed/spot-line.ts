import { modeOf, type SpotMode } from '../../shared/contracts/spot-mode.ts';
import { bandOfKhz } from '../../shared/radio/bands.ts';
import { createCallReader } from '../spots/call-reader.ts';

/** What a spot line says. */
export interface SpotLine {
  kind: 'spot';
  /** As written, with its marks: "EI7QSA-#". See `ReceiverNames`. */
  receiver: string;
  call: string;
  freq100Hz: number;
  bandMetres: number;
  mode: SpotMode;
  snrDb: number;
  /** Null where the line has none, or bits a second. */
  speedWpm: number | null;
  /** "CQ", "DX", "NCDXF B", as written; empty when there is none. */
  what: string;
  /** Minute of the UTC day, 0 to 1439. */
  minute: number;
}

export interface RefusedLine {
  kind: 'refused';
  field: 'receiver' | 'freq' | 'call' | 'mode' | 'snr' | 'speed' | 'time' | 'line';
  /** A sentence: what was wrong and what is accepted. */
  reason: string;
  /** As written; null when the line does not come to it. */
  receiver: string | null;
}

/** Welcomes, prompts, announcements: nothing that claims to be a spot. */
export interface OtherLine {
  kind: 'other';
}

export type ParsedLine = SpotLine | RefusedLine | OtherLine;

const other: OtherLine = { kind: 'other' };

/** Lowest and highest that a receiver can mean; beyond them a line is damaged. */
const snrRangeDb = [-60, 120] as const;
const longestSpeed = 200;

/**
 * Makes a parser for the trade's one-line telnet spot (common practice, no standard), such as
 * `DX de EI7QSA-#:  1824.5  EA8QSH       CW    21 dB  22 WPM  CQ      1812Z`. It goes by white space, of
 * which there may be any amount, and stands missing speeds, missing kinds, and text after the time.
 * A parser never throws.
 */
export function createSpotLineParser(): (line: string) => ParsedLine {
  const readCall = createCallReader();

  return (line) => {
    // Bells and zeros hide at the ends of lines.
    const text = line.replace(/\p{Cc}+/gu, ' ').trim();
    if (!/^DX de(\s|$)/i.test(text)) return other;
    const head = /^DX de\s+([^\s:]+)\s*:\s*(.*)$/i.exec(text);
    if (head === null) {
      return refuse(null, 'receiver', 'A spot line begins with "DX de", a receiver and a colon.');
    }
    const receiver = head[1]!;
    const words = head[2]!.split(/\s+/);
    let at = 0;
    const next = (): string => words[at++] ?? '';

    const freq = next();
    if (!/^\d{1,9}(\.\d{1,6})?$/.test(freq)) {
      return refuse(receiver, 'freq', `The frequency is ${shown(freq)}; it must be in kHz, such as 1824.5.`);
    }
    const bandMetres = bandOfKhz(Number(freq));
    if (bandMetres === null) {
      return refuse(receiver, 'freq', `${freq} kHz lies in no amateur band from 2200 m to 6 m.`);
    }
    const call = readCall(next());
    if (typeof call !== 'string') return refuse(receiver, 'call', call.reason);
    const mode = next();
    if (!/^[A-Z][A-Z0-9/-]{0,11}$/i.test(mode)) {
      return refuse(receiver, 'mode', `The mode is ${shown(mode)}; it must be a word such as CW.`);
    }
    const snr = readQuantity(words, at, /^dB$/i);
    if (snr === null) {
      return refuse(receiver, 'snr', 'After the mode there must be a whole number and "dB", such as 21 dB.');
    }
    at = snr.next;
    if (snr.value < snrRangeDb[0] || snr.value > snrRangeDb[1]) {
      return refuse(
        receiver,
        'snr',
        `${snr.value} dB cannot be; accepted are ${snrRangeDb[0]} to ${snrRangeDb[1]} dB.`,
      );
    }
    const speed = readQuantity(words, at, /^(WPM|BPS)$/i);
    if (speed !== null) at = speed.next;
    const isMorse = speed !== null && /WPM$/i.test(speed.unit);
    if (isMorse && !(speed.value >= 1 && speed.value <= longestSpeed)) {
      return refuse(
        receiver,
        'speed',
        `A speed of ${speed.value} WPM cannot be; accepted are 1 to ${longestSpeed}.`,
      );
    }
    const rest = words.slice(at);
    const clockAt = rest.findLastIndex((word) => /^\d{4}Z$/i.test(word));
    const clock = rest[clockAt];
    if (clock === undefined) {
      return refuse(receiver, 'time', 'The line has no UTC time of four digits and Z, such as 1812Z.');
    }
    const hours = Number(clock.slice(0, 2));
    const minutes = Number(clock.slice(2, 4));
    if (hours > 23 || minutes > 59) {
      return refuse(receiver, 'time', `${clock} is no time of the day; accepted are 0000Z to 2359Z.`);
    }
    return {
      kind: 'spot',
      receiver,
      call,
      freq100Hz: Math.round(Number(freq) * 10),
      bandMetres,
      mode: modeOf(mode),
      snrDb: snr.value,
      speedWpm: isMorse ? speed.value : null,
      what: rest.slice(0, clockAt).join(' '),
      minute: hours * 60 + minutes,
    };
  };
}

function refuse(receiver: string | null, field: RefusedLine['field'], reason: string): RefusedLine {
  return { kind: 'refused', field, reason, receiver };
}

function shown(word: string): string {
  return word === '' ? 'missing' : `"${word.slice(0, 40)}"`;
}

/** "21 dB" or "21dB" at `at`. */
function readQuantity(
  words: readonly string[],
  at: number,
  unit: RegExp,
): { value: number; unit: string; next: number } | null {
  const [, digits, glued] = /^([+-]?\d{1,4})([A-Z]*)$/i.exec(words[at] ?? '') ?? [];
  if (digits === undefined) return null;
  const written = glued === '' || glued === undefined ? (words[at + 1] ?? '') : glued;
  if (!unit.test(written)) return null;
  return { value: Number(digits) + 0, unit: written, next: at + (glued === '' ? 2 : 1) };
}
