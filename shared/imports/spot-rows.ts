import type { SpotMapping } from '../contracts/import.ts';
import { modeOf, type SpotMode } from '../contracts/spot-mode.ts';
import { createCallReader } from '../radio/call-reader.ts';
import { isRefusal, type Refusal } from '../radio/place.ts';
import { remember } from '../radio/remember.ts';
import { readFrequency, readSnrDb, readSpeedWpm, shorten } from '../radio/spot-fields.ts';
import { takeApartSpotLine } from '../radio/spot-line.ts';
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

const spotLineExample = 'DX de EI7QSA-#: 1824.5 EA8QSH CW 21 dB 22 WPM CQ 1812Z';

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

/** A row to be filled. */
export function blankSpotRow(): SpotRow {
  return {
    heardAtMs: 0,
    receiverId: 0,
    call: '',
    freq100Hz: 0,
    bandMetres: 0,
    snrDb: 0,
    speedWpm: null,
    mode: 'other',
    uncertaintySeconds: 0,
    feedMinute: null,
  };
}

/**
 * Throws a MappingError when the mapping does not fit the file's header or the station. `takeRow` gives the
 * object that a good row fills: whoever reads millions gives the same ones again.
 */
export function createSpotRowReader(
  mapping: SpotMapping,
  header: readonly string[] | null,
  context: ReadingContext,
  takeRow: () => SpotRow = blankSpotRow,
): SpotRowReader {
  const problems = checkSpotMapping(mapping, context);
  if (problems.length > 0) throw new MappingError(problems);
  const fields = createFieldReaders(mapping, context, takeRow);
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
    const line = takeApartSpotLine(cells[0]!);
    if (line === null) return { field: null, reason: `The line is not a spot such as "${spotLineExample}".` };
    if ('reason' in line) {
      const isOther = line.receiver !== null && fields.receiver(line.receiver) === 'other receiver';
      return isOther ? 'other receiver' : { field: line.field, reason: line.reason };
    }
    const atMs = toDay(line.minute * 60_000);
    const receiverId = fields.receiver(line.receiver);
    if (typeof receiverId !== 'number') return receiverId;
    return fields.row(atMs, true, receiverId, line.call, line.freqKhz, line.snrDb, line.mode, line.speedWpm);
  };
}

function createFieldReaders(mapping: SpotMapping, context: ReadingContext, takeRow: () => SpotRow) {
  const findReceiver = createReceiverFinder(mapping, context.receivers);
  const unit = mapping.layout === 'spot lines' ? 'kHz' : mapping.freqUnit;
  const decimalComma = mapping.layout === 'table' && mapping.format.decimalComma;
  const readCall = createCallReader();
  const readFreq = remember((text) => readFrequency(text, unit, decimalComma));
  const readSnr = remember(readSnrDb);
  // Tables fill a column that must not be empty with 0: that is no speed, and no reason to lose the spot.
  const zeroIsNone = mapping.layout === 'table';
  const readSpeed = remember((text) => (zeroIsNone && /^0+$/.test(text.trim()) ? null : readSpeedWpm(text)));
  const readMode = remember(modeOf);

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
    const call = readCall(callText);
    if (typeof call !== 'string') return { field: 'call', reason: call.reason };
    const freq = readFreq(freqText);
    if ('reason' in freq) return { field: 'freq', reason: freq.reason };
    const snrDb = readSnr(snrText);
    if (typeof snrDb !== 'number') return { field: 'snr', reason: snrDb.reason };
    const speedWpm = readSpeed(speedText);
    if (speedWpm !== null && typeof speedWpm !== 'number') return { field: 'speed', reason: speedWpm.reason };
    const spot = takeRow();
    spot.heardAtMs = minutesOnly ? Math.floor(atMs / 60_000) * 60_000 : atMs;
    spot.receiverId = receiverId;
    spot.call = call;
    spot.freq100Hz = freq.freq100Hz;
    spot.bandMetres = freq.bandMetres;
    spot.snrDb = snrDb;
    spot.speedWpm = speedWpm;
    spot.mode = readMode(modeText);
    spot.uncertaintySeconds = minutesOnly ? 60 : 0;
    return spot;
  }

  return { receiver, row };
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
