import { modeOf, type SpotMode } from '../../shared/contracts/spot-mode.ts';
import { createCallReader } from '../../shared/radio/call-reader.ts';
import { readFrequency, readSnrDb, readSpeedWpm } from '../../shared/radio/spot-fields.ts';
import { takeApartSpotLine, type SpotLineRefusal } from '../../shared/radio/spot-line.ts';

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

export interface RefusedLine extends SpotLineRefusal {
  kind: 'refused';
}

/** Welcomes, prompts, announcements: nothing that claims to be a spot. */
export interface OtherLine {
  kind: 'other';
}

export type ParsedLine = SpotLine | RefusedLine | OtherLine;

const other: OtherLine = { kind: 'other' };

/** Makes a parser for the lines of a live feed (see `takeApartSpotLine`). A parser never throws. */
export function createSpotLineParser(): (line: string) => ParsedLine {
  const readCall = createCallReader();

  return (line) => {
    const parts = takeApartSpotLine(line);
    if (parts === null) return other;
    if ('reason' in parts) return { kind: 'refused', ...parts };
    const { receiver, what, minute } = parts;
    const refuse = (field: RefusedLine['field'], reason: string): RefusedLine => ({
      kind: 'refused',
      field,
      reason,
      receiver,
    });
    const call = readCall(parts.call);
    if (typeof call !== 'string') return refuse('call', call.reason);
    const freq = readFrequency(parts.freqKhz, 'kHz', false);
    if ('reason' in freq) return refuse('freq', freq.reason);
    const snrDb = readSnrDb(parts.snrDb);
    if (typeof snrDb !== 'number') return refuse('snr', snrDb.reason);
    const speedWpm = readSpeedWpm(parts.speedWpm);
    if (speedWpm !== null && typeof speedWpm !== 'number') return refuse('speed', speedWpm.reason);
    return { kind: 'spot', receiver, call, ...freq, mode: modeOf(parts.mode), snrDb, speedWpm, what, minute };
  };
}
