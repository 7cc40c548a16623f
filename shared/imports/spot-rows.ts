import type { SpotMapping } from '../contracts/import.ts';
import { modeOf, type SpotMode } from '../contracts/spot-mode.ts';
import { bandOfKhz } from '../radio/bands.ts';
import { parseCallSign } from '../radio/call-sign.ts';
import { isRefusal, type Refusal } from '../radio/place.ts';
import type { FileRecord } from './delimited.ts';
import {
  checkTimeRange,
  createReceiverFinder,
  createWidthCheck,
  formatInstant,
  MappingError,
  resolveColumns,
  widthNeeded,
  type FieldRefusal,
  type MappingProblem,
  type ReadingContext,
} from './reading.ts';
import { parseSpotLine } from './spot-line.ts';
import { compileTimeFormat, createDayRoller, type TimeReader } from './time-format.ts';

/** A spot as a file gives it: what the worker stores. */
export interface SpotRow {
  heardAtMs: number;
  receiverId: number;
  call: string;
  freq100Hz: number;
  bandMetres: number;
  snrDb: number;
  speedWpm: number | null;
  mode: SpotMode;
  uncertaintySeconds: number;
  feedMinute: null;
}

/** `other receiver`: left out without a refusal, because the mapping says so. */
export type SpotOutcome = SpotRow | FieldRefusal | 'other receiver';
export type SpotRowReader = (record: FileRecord) => SpotOutcome;

export function isFieldRefusal(outcome: object): outcome is FieldRefusal {
  return 'reason' in outcome;
}

/** Receivers report SNR in whole dB; beyond these it is another column. */
const lowestSnrDb = -60;
const highestSnrDb = 120;
const highestSpeedWpm = 250;
const longestCallCache = 50_000;
const unitsPerKhz = { kHz: 1, MHz: 0.001, Hz: 1000 } as const;

/** What is missing from a mapping, or contradicts itself, whatever the file. */
export function checkSpotMapping(mapping: SpotMapping, context: ReadingContext): MappingProblem[] {
  const problems: MappingProblem[] = [];
  const { columns } = mapping;
  const need = (is: boolean, path: string, message: string) => {
    if (!is) problems.push({ path, message });
  };
  if (mapping.layout === 'spot lines') {
    need(
      mapping.firstDay !== undefined,
      'firstDay',
      'Give the UTC day of the first line: these lines carry only a clock.',
    );
  } else {
    need(columns.time !== undefined, 'columns.time', 'Choose the column of the time.');
    need(columns.call !== undefined, 'columns.call', 'Choose the column of the call sign heard.');
    need(columns.freq !== undefined, 'columns.freq', 'Choose the column of the frequency.');
    need(columns.snr !== undefined, 'columns.snr', 'Choose the column of the SNR.');
    need(
      columns.receiver !== undefined || mapping.fixedReceiverId !== undefined,
      'columns.receiver',
      'Choose the column of the receiver, or the one receiver that the whole file is of.',
    );
    const time = compileTimeFormat(mapping.time);
    if (isRefusal(time)) problems.push({ path: 'time', message: time.reason });
    else if (time.clockOnly && columns.date === undefined) {
      need(
        mapping.firstDay !== undefined,
        'firstDay',
        'Give the UTC day of the first line: the times carry only a clock.',
      );
    }
  }
  const known = new Set(context.receivers.map(({ id }) => id));
  if (mapping.fixedReceiverId !== undefined) {
    need(known.has(mapping.fixedReceiverId), 'fixedReceiverId', 'The station has no such receiver.');
  }
  for (const [name, id] of Object.entries(mapping.receiverNames)) {
    need(known.has(id), `receiverNames.${name}`, `The station has no receiver that "${name}" could be.`);
  }
  return problems;
}

/** Throws a MappingError when the mapping does not fit the file's header or the station. */
export function createSpotRowReader(
  mapping: SpotMapping,
  header: readonly string[] | null,
  context: ReadingContext,
): SpotRowReader {
  const problems = checkSpotMapping(mapping, context);
  if (problems.length > 0) throw new MappingError(problems);
  const fields = createFieldReaders(mapping, context);
  return mapping.layout === 'spot lines'
    ? createLineReader(mapping, fields)
    : createTableReader(mapping, header, fields);
}

type FieldReaders = ReturnType<typeof createFieldReaders>;

function createTableReader(
  mapping: SpotMapping,
  header: readonly string[] | null,
  fields: FieldReaders,
): SpotRowReader {
  const at = resolveColumns(mapping.columns, header);
  const checkWidth = createWidthCheck(header, widthNeeded(at));
  const time = compileTimeFormat(mapping.time) as TimeReader;
  const { time: timeAt, date: dateAt, receiver: receiverAt } = at;
  const [callAt, freqAt, snrAt, modeAt, speedAt] = [at.call!, at.freq!, at.snr!, at.mode, at.speed];
  const toDay = time.clockOnly && mapping.firstDay !== undefined ? createDayRoller(mapping.firstDay) : null;
  const minutesOnly = time.minutesOnly || mapping.timeKnownTo === 'minute';

  return ({ cells, broken }) => {
    if (broken !== null) return { field: null, reason: broken };
    const widthFault = checkWidth(cells);
    if (widthFault !== null) return { field: null, reason: widthFault };
    const written =
      dateAt === undefined ? cells[timeAt!]! : `${cells[dateAt]!.trim()} ${cells[timeAt!]!.trim()}`;
    const read = time.read(written);
    // The clock of a line that is left out moves the day on as well.
    const atMs = typeof read === 'number' && toDay !== null ? toDay(read) : read;
    const receiverId = fields.receiver(receiverAt === undefined ? null : cells[receiverAt]!);
    if (typeof receiverId !== 'number') return receiverId;
    return fields.row(
      atMs,
      minutesOnly,
      receiverId,
      cells[callAt]!,
      cells[freqAt]!,
      cells[snrAt]!,
      modeAt === undefined ? '' : cells[modeAt]!,
      speedAt === undefined ? '' : cells[speedAt]!,
    );
  };
}

function createLineReader(mapping: SpotMapping, fields: FieldReaders): SpotRowReader {
  const toDay = createDayRoller(mapping.firstDay!);
  return ({ cells, broken }) => {
    if (broken !== null) return { field: null, reason: broken };
    const line = parseSpotLine(cells[0]!);
    if ('reason' in line) return line;
    const atMs = toDay(line.minute * 60_000);
    const receiverId = fields.receiver(line.receiver);
    if (typeof receiverId !== 'number') return receiverId;
    return fields.row(atMs, true, receiverId, line.call, line.freqKhz, line.snrDb, line.mode, line.speedWpm);
  };
}

function createFieldReaders(mapping: SpotMapping, context: ReadingContext) {
  const findReceiver = createReceiverFinder(mapping, context.receivers);
  const calls = new Map<string, string | Refusal>();
  const modes = new Map<string, SpotMode>();
  const perKhz = unitsPerKhz[mapping.layout === 'spot lines' ? 'kHz' : mapping.freqUnit];
  const decimalComma = mapping.layout === 'table' && mapping.format.decimalComma;

  function receiver(name: string | null): number | FieldRefusal | 'other receiver' {
    if (mapping.fixedReceiverId !== undefined) return mapping.fixedReceiverId;
    const id = findReceiver(name ?? '');
    if (id !== null) return id;
    const trimmed = (name ?? '').trim();
    if (trimmed === '') return { field: 'receiver', reason: 'The receiver is empty.' };
    context.onUnknownReceiver?.(trimmed);
    if (mapping.otherReceivers === 'skip') return 'other receiver';
    return {
      field: 'receiver',
      reason: `"${shorten(trimmed)}" is no receiver of the station; add it, or say which one it is.`,
    };
  }

  function call(text: string): string | Refusal {
    const known = calls.get(text);
    if (known !== undefined) return known;
    const parsed = parseCallSign(text);
    // A copy: a piece of a string keeps the whole text that it was cut from in memory.
    const result = isRefusal(parsed) ? parsed : Buffer.from(parsed.call, 'latin1').toString('latin1');
    if (calls.size >= longestCallCache) calls.clear();
    calls.set(Buffer.from(text, 'utf8').toString('utf8'), result);
    return result;
  }

  function mode(text: string): SpotMode {
    let found = modes.get(text);
    if (found === undefined) {
      found = modeOf(text);
      if (modes.size < 1000) modes.set(text, found);
    }
    return found;
  }

  function freqKhz(text: string): number | Refusal {
    const trimmed = decimalComma ? text.trim().replace(',', '.') : text.trim();
    if (trimmed === '') return { reason: 'The frequency is empty.' };
    if (!/^\d{1,10}(?:\.\d{1,9})?$/.test(trimmed)) {
      const example = decimalComma ? '1824,5' : '1824.5';
      return { reason: `The frequency "${shorten(text.trim())}" is not a number such as ${example}.` };
    }
    return Number(trimmed) / perKhz;
  }

  function row(
    atMs: number | Refusal,
    minutesOnly: boolean,
    receiverId: number,
    callText: string,
    freqText: string,
    snrText: string,
    modeText: string,
    speedText: string,
  ): SpotRow | FieldRefusal {
    if (typeof atMs !== 'number') return { field: 'time', reason: atMs.reason };
    const outside = checkTimeRange(atMs, context.nowMs);
    if (outside !== null) return { field: 'time', reason: outside };
    const callRead = call(callText);
    if (typeof callRead !== 'string') return { field: 'call', reason: callRead.reason };
    const khz = freqKhz(freqText);
    if (typeof khz !== 'number') return { field: 'freq', reason: khz.reason };
    const bandMetres = bandOfKhz(khz);
    if (bandMetres === null) {
      return {
        field: 'freq',
        reason: `The frequency "${shorten(freqText.trim())}" is in no amateur band (2200 m to 6 m); the mapping reads it as ${mapping.layout === 'table' ? mapping.freqUnit : 'kHz'}.`,
      };
    }
    const snr = wholeNumber(snrText, 'dB');
    if (snr === null || snr < lowestSnrDb || snr > highestSnrDb) {
      const written = snrText.trim();
      return {
        field: 'snr',
        reason:
          written === ''
            ? 'The SNR is empty.'
            : `The SNR "${shorten(written)}" is not a whole number of dB from −60 to 120.`,
      };
    }
    const speed = speedText.trim() === '' ? null : wholeNumber(speedText, 'WPM');
    if (speedText.trim() !== '' && (speed === null || speed < 0 || speed > highestSpeedWpm)) {
      return {
        field: 'speed',
        reason: `The speed "${shorten(speedText.trim())}" is not a whole number of words a minute from 0 to ${highestSpeedWpm}.`,
      };
    }
    return {
      heardAtMs: minutesOnly ? Math.floor(atMs / 60_000) * 60_000 : atMs,
      receiverId,
      call: callRead,
      freq100Hz: Math.round(khz * 10),
      bandMetres,
      snrDb: snr,
      speedWpm: speed,
      mode: mode(modeText),
      uncertaintySeconds: minutesOnly ? 60 : 0,
      feedMinute: null,
    };
  }

  return { receiver, row };
}

function wholeNumber(text: string, unit: string): number | null {
  const value = text.length < 4 ? Number(text) : Number.NaN;
  // Short and plain nearly always; an empty text would be 0.
  if (Number.isInteger(value) && text.trim() !== '' && !/[a-z.]/i.test(text)) return value + 0;
  const match = /^\s*([+\-−]?)(\d{1,5})\s*([a-z]*)\s*$/i.exec(text);
  if (match === null || (match[3] !== '' && match[3]!.toLowerCase() !== unit.toLowerCase())) return null;
  const size = Number(match[2]);
  return match[1] === '-' || match[1] === '−' ? 0 - size : size;
}

function shorten(text: string): string {
  return text.length > 40 ? `${text.slice(0, 40)}…` : text;
}

/** What a row becomes, by field name, as text: for the preview. */
export function describeSpot(row: SpotRow, receiverName: (id: number) => string): Record<string, string> {
  return {
    time: formatInstant(row.heardAtMs),
    receiver: receiverName(row.receiverId),
    call: row.call,
    freq: `${(row.freq100Hz / 10).toFixed(1)} kHz`,
    band: `${row.bandMetres} m`,
    snr: `${row.snrDb} dB`.replace(/^-/, '−'),
    mode: row.mode,
    speed: row.speedWpm === null ? '' : `${row.speedWpm} WPM`,
  };
}
