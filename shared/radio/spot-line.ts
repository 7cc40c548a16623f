import { shorten } from './spot-fields.ts';

/**
 * The parts of the trade's one-line telnet spot (common practice, no standard), as written:
 * `DX de EI7QSA-#:  1824.5  EA8QSH       CW    21 dB  22 WPM  CQ      1812Z`.
 */
export interface SpotLineParts {
  /** With its marks: "EI7QSA-#". */
  receiver: string;
  freqKhz: string;
  call: string;
  mode: string;
  snrDb: string;
  /** Empty where there is none, or bits a second. */
  speedWpm: string;
  /** "CQ", "DX", "NCDXF B"; empty when there is none. */
  what: string;
  /** Minute of the UTC day, 0 to 1439. */
  minute: number;
}

export type SpotLineField = 'receiver' | 'freq' | 'call' | 'mode' | 'snr' | 'speed' | 'time';

export interface SpotLineRefusal {
  field: SpotLineField;
  /** A sentence: what was wrong and what is accepted. */
  reason: string;
  /** As written; null when the line does not come to it. */
  receiver: string | null;
}

/** Text may hang on to it, but no letter or digit. */
const clock = /^(\d\d)(\d\d)Z(?!\w)/i;

/**
 * Takes a spot line apart for the live feed and for files alike, whose readers then make numbers of the
 * parts. It goes by white space, of which there may be any amount, and stands missing speeds, missing kinds
 * and text after the time. Null for a line that does not claim to be a spot; it never throws.
 */
export function takeApartSpotLine(line: string): SpotLineParts | SpotLineRefusal | null {
  // Bells and zeros hide at the ends of lines.
  const text = line.replace(/\p{Cc}+/gu, ' ').trim();
  if (!/^DX\s+de(?:\s|$)/i.test(text)) return null;
  const head = /^DX\s+de\s+([^\s:]+)\s*:\s*(.*)$/i.exec(text);
  if (head === null) {
    return refuse(null, 'receiver', 'A spot line begins with "DX de", a receiver and a colon.');
  }
  const receiver = head[1]!;
  const words = head[2]!.split(/\s+/);
  const [freqKhz = '', call = '', mode = ''] = words;
  if (freqKhz === '') {
    return refuse(receiver, 'freq', 'The line has no frequency in kHz after the receiver, such as 1824.5.');
  }
  if (call === '') return refuse(receiver, 'call', 'The line has no call sign after the frequency.');
  if (mode === '') return refuse(receiver, 'mode', 'The line has no mode after the call sign, such as CW.');
  if (!/^[A-Z][A-Z0-9/-]{0,11}$/i.test(mode)) {
    return refuse(receiver, 'mode', `The mode "${shorten(mode)}" is not a word such as CW.`);
  }
  const snr = readQuantity(words, 3, /^dB$/i);
  if (snr === null) {
    return refuse(
      receiver,
      'snr',
      'The line has no SNR after the mode: a whole number and "dB", such as 21 dB.',
    );
  }
  const speed = readQuantity(words, snr.next, /^(?:WPM|BPS)$/i);
  const rest = words.slice(speed?.next ?? snr.next);
  const clockAt = rest.findLastIndex((word) => clock.test(word));
  const [, hours, minutes] = clock.exec(rest[clockAt] ?? '') ?? [];
  if (hours === undefined || minutes === undefined) {
    return refuse(receiver, 'time', 'The line has no UTC time of four digits and Z, such as 1812Z.');
  }
  if (Number(hours) > 23 || Number(minutes) > 59) {
    return refuse(
      receiver,
      'time',
      `The clock "${hours}${minutes}Z" does not exist; it goes from 0000Z to 2359Z.`,
    );
  }
  return {
    receiver,
    freqKhz,
    call,
    mode,
    snrDb: snr.digits,
    speedWpm: speed !== null && /^WPM$/i.test(speed.unit) ? speed.digits : '',
    what: rest.slice(0, clockAt).join(' '),
    minute: Number(hours) * 60 + Number(minutes),
  };
}

function refuse(receiver: string | null, field: SpotLineField, reason: string): SpotLineRefusal {
  return { field, reason, receiver };
}

/** "21 dB" or "21dB" at `at`. */
function readQuantity(
  words: readonly string[],
  at: number,
  unit: RegExp,
): { digits: string; unit: string; next: number } | null {
  const [, digits, glued] = /^([+\-−]?\d+)([A-Z]*)$/i.exec(words[at] ?? '') ?? [];
  if (digits === undefined) return null;
  const apart = glued === '' || glued === undefined;
  const written = apart ? (words[at + 1] ?? '') : glued;
  return unit.test(written) ? { digits, unit: written, next: at + (apart ? 2 : 1) } : null;
}
