import { bandOfKhz } from './bands.ts';
import type { Refusal } from './place.ts';

/** Lowest and highest that a receiver can mean; beyond them a line is damaged or it is another column. */
const snrRangeDb = [-60, 120] as const;
const speedRangeWpm = [1, 200] as const;
const unitsPerKhz = { kHz: 1, MHz: 0.001, Hz: 1000 } as const;

export type FreqUnit = keyof typeof unitsPerKhz;

export interface SpotFrequency {
  /** Whole steps of 100 Hz. */
  freq100Hz: number;
  bandMetres: number;
}

export function readFrequency(text: string, unit: FreqUnit, decimalComma: boolean): SpotFrequency | Refusal {
  const written = text.trim();
  if (written === '') return { reason: 'The frequency is empty.' };
  const plain = decimalComma ? written.replace(',', '.') : written;
  if (!/^\d{1,10}(?:\.\d{1,9})?$/.test(plain)) {
    const example = decimalComma ? '1824,5' : '1824.5';
    return { reason: `The frequency "${shorten(written)}" is not a number such as ${example}.` };
  }
  const khz = Number(plain) / unitsPerKhz[unit];
  const bandMetres = bandOfKhz(khz);
  if (bandMetres !== null) return { freq100Hz: Math.round(khz * 10), bandMetres };
  return {
    reason: `The frequency "${shorten(written)}" is in no amateur band (2200 m to 6 m); it is read as ${unit}.`,
  };
}

/** In whole dB, as receivers report it. */
export function readSnrDb(text: string): number | Refusal {
  const written = text.trim();
  if (written === '') return { reason: 'The SNR is empty.' };
  const snrDb = wholeNumber(written, 'dB');
  if (snrDb !== null && snrDb >= snrRangeDb[0] && snrDb <= snrRangeDb[1]) return snrDb;
  return {
    reason: `The SNR "${shorten(written)}" is not a whole number of dB from −60 to ${snrRangeDb[1]}.`,
  };
}

/** Absent and empty speeds are no fault: many modes have none. */
export function readSpeedWpm(text: string): number | null | Refusal {
  const written = text.trim();
  if (written === '') return null;
  const speedWpm = wholeNumber(written, 'WPM');
  const [lowest, highest] = speedRangeWpm;
  if (speedWpm !== null && speedWpm >= lowest && speedWpm <= highest) return speedWpm;
  return {
    reason: `The speed "${shorten(written)}" is not a whole number of words a minute from ${lowest} to ${highest}.`,
  };
}

/** With its unit behind it or without; null for anything else. */
function wholeNumber(written: string, unit: string): number | null {
  const match = /^([+\-−]?)(\d{1,5})\s*([a-z]*)$/i.exec(written);
  if (match === null || (match[3] !== '' && match[3]!.toLowerCase() !== unit.toLowerCase())) return null;
  const size = Number(match[2]);
  return match[1] === '-' || match[1] === '−' ? 0 - size : size;
}

/** For quoting what was written in a sentence. */
export function shorten(text: string): string {
  return text.length > 40 ? `${text.slice(0, 40)}…` : text;
}
