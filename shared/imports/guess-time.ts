import type { TimeFormat } from '../contracts/import.ts';
import { isRefusal } from '../radio/place.ts';
import { earliestMs } from './reading.ts';
import { compileTimeFormat } from './time-format.ts';

const zone = 'UTC';
const dates = [
  ...['yyyy-MM-dd', 'yyyy/MM/dd', 'yyyy.MM.dd', 'dd.MM.yyyy', 'd.M.yyyy', 'dd/MM/yyyy', 'd/M/yyyy'],
  // Days first where both readings fit: nearly all the world's custom.
  ...[
    'MM/dd/yyyy',
    'M/d/yyyy',
    'dd-MM-yyyy',
    'yyyyMMdd',
    'dd-MMM-yyyy',
    'd-MMM-yyyy',
    'dd MMM yyyy',
    'd MMM yyyy',
  ],
  ...['yy-MM-dd', 'dd.MM.yy', 'dd/MM/yy', 'dd-MMM-yy'],
];
const clocks = ['HH:mm:ss', 'HH:mm:ss.SSS', 'HH:mm', 'HHmmss', 'HHmm', 'H:mm:ss', 'H:mm'];
const clocksOnly = [...clocks, 'HH:mmZ', 'HHmmZ'];

const candidates: readonly TimeFormat[] = [
  { kind: 'iso', zone },
  ...dates.flatMap((date) => clocks.map((clock) => `${date} ${clock}`)).map(patternOf),
  ...['yyyyMMddHHmmss', 'yyyyMMddHHmm', 'yyyy-MM-dd HH:mm:ssZ', 'yyyy-MM-dd HH:mmZ'].map(patternOf),
];

function patternOf(pattern: string): TimeFormat {
  return { kind: 'pattern', pattern, zone };
}

/** The first way of writing times that reads nearly all of the texts; null when none does. */
export function guessTimeFormat(texts: readonly string[], nowMs: number): TimeFormat | null {
  return best(
    texts,
    [...epochs(nowMs), ...candidates],
    (ms) => ms >= earliestMs && ms < nowMs + 366 * 86_400_000,
  );
}

/** As above for a clock without a date. */
export function guessClockFormat(texts: readonly string[]): TimeFormat | null {
  return best(texts, clocksOnly.map(patternOf), () => true);
}

function epochs(nowMs: number): TimeFormat[] {
  return nowMs > earliestMs ? [{ kind: 'epoch seconds' }, { kind: 'epoch milliseconds' }] : [];
}

/** One line in ten may be broken. */
function best(
  texts: readonly string[],
  formats: readonly TimeFormat[],
  isPlausible: (ms: number) => boolean,
): TimeFormat | null {
  const filled = texts.filter((text) => text.trim() !== '');
  if (filled.length === 0) return null;
  for (const format of formats) {
    const reader = compileTimeFormat(format);
    if (isRefusal(reader)) continue;
    const fitting = filled.filter((text) => {
      const ms = reader.read(text);
      return typeof ms === 'number' && isPlausible(ms);
    });
    if (fitting.length >= filled.length * 0.9) return format;
  }
  return null;
}

/** Whether times that could say seconds never do: enough of them, and each on the full minute. */
export function saysMinutesOnly(texts: readonly string[], format: TimeFormat): boolean {
  const reader = compileTimeFormat(format);
  if (isRefusal(reader)) return false;
  if (reader.minutesOnly) return true;
  const times = texts.map(reader.read).filter((ms) => typeof ms === 'number');
  return new Set(times).size >= 10 && times.every((ms) => ms % 60_000 === 0);
}
