/**
 * How numbers, times and lengths are written everywhere on the screen and in exports for people: a real minus
 * sign, a thin space before the unit, intervals as "1.1 to 2.5 dB", times in UTC with a Z.
 */
import { metresToFeet } from './radio/convert.ts';

export const MINUS = '\u2212';
export const THIN_SPACE = '\u2009';
export type LengthUnit = 'm' | 'ft';

/** Something that was not computable is shown as this, never as NaN. */
export const UNKNOWN = 'not known';

const grouped = new Intl.NumberFormat('en-GB', { useGrouping: true, maximumFractionDigits: 20 });

/** Whole numbers with a thin space between thousands: "12 480". */
export function formatCount(count: number): string {
  return withMinus(grouped.format(Math.round(count)).replaceAll(',', THIN_SPACE));
}

/** A number with fixed decimals and a real minus sign; a value that rounds to zero carries no sign. */
export function formatNumber(value: number, decimals = 1): string {
  return withMinus(unsignedZero(value.toFixed(decimals)));
}

/** With "+" in front of positive numbers: for differences. */
export function formatSigned(value: number, decimals = 1): string {
  const text = formatNumber(value, decimals);
  return /[1-9]/.test(text) && value > 0 ? `+${text}` : text;
}

/** A difference in dB: "+1.8 dB". */
export function formatDb(db: number | null | undefined, decimals = 1): string {
  return isNumber(db) ? `${formatSigned(db, decimals)}${THIN_SPACE}dB` : UNKNOWN;
}

/** A level or margin in dB, where a sign would say nothing: "24 dB". */
export function formatLevel(db: number | null | undefined, decimals = 0): string {
  return isNumber(db) ? `${formatNumber(db, decimals)}${THIN_SPACE}dB` : UNKNOWN;
}

/** An interval in dB: "1.1 to 2.5 dB", both ends signed as soon as one is negative. */
export function formatDbInterval(
  interval: readonly [low: number, high: number] | null | undefined,
  decimals = 1,
): string {
  if (!interval || !isNumber(interval[0]) || !isNumber(interval[1])) return UNKNOWN;
  const write = interval[0] < 0 ? formatSigned : formatNumber;
  return `${write(interval[0], decimals)} to ${write(interval[1], decimals)}${THIN_SPACE}dB`;
}

/** A share of one: "62 %". */
export function formatShare(share: number | null | undefined, decimals = 0): string {
  return isNumber(share) ? `${formatNumber(share * 100, decimals)}${THIN_SPACE}%` : UNKNOWN;
}

/** Azimuth or any other angle: "045°" as headings are spoken, in three figures. */
export function formatHeading(azimuthDeg: number | null | undefined): string {
  if (!isNumber(azimuthDeg)) return UNKNOWN;
  const turned = ((Math.round(azimuthDeg) % 360) + 360) % 360;
  return `${String(turned).padStart(3, '0')}°`;
}

/** An angle that is no heading, such as a beamwidth: "70°". */
export function formatDegrees(angleDeg: number | null | undefined, decimals = 0): string {
  return isNumber(angleDeg) ? `${formatNumber(angleDeg, decimals)}°` : UNKNOWN;
}

export function formatKhz(freqKhz: number): string {
  return `${freqKhz.toFixed(1)}${THIN_SPACE}kHz`;
}

export function formatBand(bandMetres: number): string {
  return `${bandMetres}${THIN_SPACE}m`;
}

export function formatKm(km: number | null | undefined): string {
  return isNumber(km) ? `${formatCount(km)}${THIN_SPACE}km` : UNKNOWN;
}

/** A length in the unit its reader chose; whole feet, and metres with one decimal below 100. */
export function formatLength(metres: number | null | undefined, unit: LengthUnit): string {
  if (!isNumber(metres)) return UNKNOWN;
  const length = unit === 'ft' ? metresToFeet(metres) : metres;
  const decimals = unit === 'm' && Math.abs(length) < 100 && !Number.isInteger(length) ? 1 : 0;
  return `${formatNumber(length, decimals)}${THIN_SPACE}${unit}`;
}

type Moment = string | number | Date;

/** "18:05Z" or, with seconds, "18:05:09Z". */
export function formatUtcTime(at: Moment | null | undefined, seconds = false): string {
  const iso = isoOf(at);
  return iso === null ? UNKNOWN : `${iso.slice(11, seconds ? 19 : 16)}Z`;
}

/** "2026-11-30". */
export function formatUtcDay(at: Moment | null | undefined): string {
  return isoOf(at)?.slice(0, 10) ?? UNKNOWN;
}

/** "2026-11-30 18:05Z". */
export function formatUtc(at: Moment | null | undefined, seconds = false): string {
  const iso = isoOf(at);
  return iso === null ? UNKNOWN : `${iso.slice(0, 10)} ${formatUtcTime(at, seconds)}`;
}

/** The station's own clock, without a zone name: "19:05". An unknown zone falls back to UTC with its Z. */
export function formatLocalTime(at: Moment, timeZone: string): string {
  try {
    return new Intl.DateTimeFormat('en-GB', {
      hour: '2-digit',
      minute: '2-digit',
      hourCycle: 'h23',
      timeZone,
    }).format(new Date(at));
  } catch (error) {
    if (error instanceof RangeError) return formatUtcTime(at);
    throw error;
  }
}

/** "45 s", "12 min", "1 h 12 min", "3 d 4 h": the two largest units that say something. */
export function formatDuration(seconds: number | null | undefined): string {
  if (!isNumber(seconds)) return UNKNOWN;
  const whole = Math.round(Math.abs(seconds));
  if (whole < 60) return `${whole}${THIN_SPACE}s`;
  const minutes = Math.round(whole / 60);
  if (minutes < 60) return `${minutes}${THIN_SPACE}min`;
  if (minutes < 1440) return pair(Math.floor(minutes / 60), 'h', minutes % 60, 'min');
  const hours = Math.round(minutes / 60);
  return pair(Math.floor(hours / 24), 'd', hours % 24, 'h');
}

/** "12 min ago", "in 1 h 12 min", "now" within five seconds. */
export function formatAgo(at: Moment | null | undefined, nowMs: number): string {
  const iso = isoOf(at);
  if (iso === null) return UNKNOWN;
  const seconds = (nowMs - Date.parse(iso)) / 1000;
  if (Math.abs(seconds) < 5) return 'now';
  return seconds > 0 ? `${formatDuration(seconds)} ago` : `in ${formatDuration(seconds)}`;
}

const byteUnits = ['B', 'kB', 'MB', 'GB', 'TB'];
/** Decimal units: "48 kB", "1.2 MB". */
export function formatBytes(bytes: number): string {
  let size = bytes;
  let at = 0;
  while (size >= 999.5 && at < byteUnits.length - 1) {
    size /= 1000;
    at += 1;
  }
  return `${formatNumber(size, at > 0 && size < 9.95 ? 1 : 0)}${THIN_SPACE}${byteUnits[at]}`;
}

/** "1 spot", "12 480 spots". Pass the plural where it is not the singular with an s. */
export function countOf(count: number, singular: string, plural = `${singular}s`): string {
  return `${formatCount(count)} ${Math.round(count) === 1 ? singular : plural}`;
}

function isNumber(value: number | null | undefined): value is number {
  return typeof value === 'number' && Number.isFinite(value);
}

function withMinus(text: string): string {
  return text.replace('-', MINUS);
}

function unsignedZero(text: string): string {
  return /[1-9]/.test(text) ? text : text.replace('-', '');
}

function isoOf(at: Moment | null | undefined): string | null {
  if (at === null || at === undefined) return null;
  const date = new Date(at);
  return Number.isNaN(date.getTime()) ? null : date.toISOString();
}

function pair(large: number, largeUnit: string, small: number, smallUnit: string): string {
  const first = `${large}${THIN_SPACE}${largeUnit}`;
  return small === 0 ? first : `${first} ${small}${THIN_SPACE}${smallUnit}`;
}
