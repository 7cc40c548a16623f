import type { DwellMapping } from '../contracts/import.ts';
import { isRefusal } from '../radio/place.ts';
import type { FileRecord } from './delimited.ts';
import {
  bareReceiverCall,
  checkTimeRange,
  createReceiverFinder,
  createWidthCheck,
  MappingError,
  resolveColumns,
  widthNeeded,
  type FieldRefusal,
  type MappingProblem,
  type ReadingContext,
} from './reading.ts';
import { compileTimeFormat, type TimeReader } from './time-format.ts';

/** A receiver or antenna: the station's own, or one that the import makes under this name. */
export type Named = { id: number } | { make: string };

/** A line of a switch log as it stands in the file. */
export interface DwellRow {
  lineNo: number;
  raw: string;
  receiver: Named;
  /** null: this line is refused, but it still says that the dwell before it ended (see `startMs`). */
  antenna: Named | null;
  startMs: number;
  /** null: until the receiver's next dwell. */
  endMs: number | null;
  note: string;
}

export interface DwellReading {
  row: DwellRow | null;
  refusal: FieldRefusal | null;
}
export type DwellRowReader = (record: FileRecord) => DwellReading;

const longestNote = 400;
const longestAntennaName = 40;
const receiverCall = /^(?=.*[0-9])(?=.*[A-Z])[A-Z0-9]{3,12}$/;

export function checkDwellMapping(mapping: DwellMapping, context: ReadingContext): MappingProblem[] {
  const problems: MappingProblem[] = [];
  const need = (is: boolean, path: string, message: string) => {
    if (!is) problems.push({ path, message });
  };
  need(
    mapping.columns.receiver !== undefined || mapping.fixedReceiverId !== undefined,
    'columns.receiver',
    'Choose the column of the receiver, or the one receiver that the whole file is of.',
  );
  const time = compileTimeFormat(mapping.time);
  if (isRefusal(time)) problems.push({ path: 'time', message: time.reason });
  else
    need(
      !time.clockOnly,
      'time.pattern',
      'A switch log needs dates: add year, month and day to the pattern.',
    );
  const receivers = new Set(context.receivers.map(({ id }) => id));
  const antennas = new Set(context.antennas.map(({ id }) => id));
  if (mapping.fixedReceiverId !== undefined) {
    need(receivers.has(mapping.fixedReceiverId), 'fixedReceiverId', 'The station has no such receiver.');
  }
  for (const [name, id] of Object.entries(mapping.receiverNames)) {
    need(receivers.has(id), `receiverNames.${name}`, `The station has no receiver that "${name}" could be.`);
  }
  for (const [name, id] of Object.entries(mapping.antennaNames)) {
    need(antennas.has(id), `antennaNames.${name}`, `The station has no antenna that "${name}" could be.`);
  }
  return problems;
}

/** Throws a MappingError when the mapping does not fit the file's header or the station. */
export function createDwellRowReader(
  mapping: DwellMapping,
  header: readonly string[] | null,
  context: ReadingContext,
): DwellRowReader {
  const problems = checkDwellMapping(mapping, context);
  if (problems.length > 0) throw new MappingError(problems);
  const at = resolveColumns(mapping.columns, header);
  const checkWidth = createWidthCheck(header, widthNeeded(at));
  const time = compileTimeFormat(mapping.time) as TimeReader;
  const receiverOf = createNamedReceiver(mapping, context);
  const antennaOf = createNamedAntenna(mapping, context);

  function readTime(field: string, text: string): number | FieldRefusal {
    const ms = time.read(text);
    if (typeof ms !== 'number') return { field, reason: ms.reason };
    const outside = checkTimeRange(ms, context.nowMs);
    return outside === null ? ms : { field, reason: outside };
  }

  return ({ lineNo, raw, cells, broken }) => {
    const refuse = (refusal: FieldRefusal, row: DwellRow | null = null): DwellReading => ({ row, refusal });
    if (broken !== null) return refuse({ field: null, reason: broken });
    const widthFault = checkWidth(cells);
    if (widthFault !== null) return refuse({ field: null, reason: widthFault });
    const receiver = receiverOf(at.receiver === undefined ? null : cells[at.receiver]!);
    if ('reason' in receiver) return refuse(receiver);
    const startMs = readTime('startsAt', cells[at.startsAt!]!);
    if (typeof startMs !== 'number') return refuse(startMs);
    const row: DwellRow = { lineNo, raw, receiver, antenna: null, startMs, endMs: null, note: '' };
    const antenna = antennaOf(cells[at.antenna!]!);
    if ('reason' in antenna) return refuse(antenna, row);
    const endText = at.endsAt === undefined ? '' : cells[at.endsAt]!.trim();
    const endMs = endText === '' ? null : readTime('endsAt', endText);
    if (endMs !== null && typeof endMs !== 'number') return refuse(endMs, row);
    if (endMs !== null && endMs <= startMs) {
      return refuse({ field: 'endsAt', reason: `The end "${endText}" does not come after the start.` }, row);
    }
    const note = at.note === undefined ? '' : cells[at.note]!.trim();
    if (note.length > longestNote) {
      const reason = `The note has "${note.length}" characters; use at most ${longestNote}.`;
      return refuse({ field: 'note', reason }, row);
    }
    return { row: { ...row, antenna, endMs, note }, refusal: null };
  };
}

function createNamedReceiver(mapping: DwellMapping, context: ReadingContext) {
  const find = createReceiverFinder(mapping, context.receivers);
  return (name: string | null): Named | FieldRefusal => {
    if (mapping.fixedReceiverId !== undefined) return { id: mapping.fixedReceiverId };
    const trimmed = (name ?? '').trim();
    if (trimmed === '') return { field: 'receiver', reason: 'The receiver is empty.' };
    const id = find(trimmed);
    if (id !== null) return { id };
    context.onUnknownReceiver?.(trimmed);
    const call = bareReceiverCall(trimmed);
    if (mapping.unknownNames === 'make' && receiverCall.test(call)) return { make: call };
    const reason =
      mapping.unknownNames === 'make'
        ? `A receiver cannot be made of "${shorten(trimmed)}": its name must be a call sign such as EI7QSB. Say which receiver it is.`
        : `"${shorten(trimmed)}" is no receiver of the station; add it, or say which one it is.`;
    return { field: 'receiver', reason };
  };
}

function createNamedAntenna(mapping: DwellMapping, context: ReadingContext) {
  const byChoice = new Map(Object.entries(mapping.antennaNames).map(([name, id]) => [name.trim(), id]));
  const byName = new Map(context.antennas.map(({ id, name }) => [name.toLowerCase(), id]));
  return (name: string): Named | FieldRefusal => {
    const trimmed = name.trim();
    if (trimmed === '') return { field: 'antenna', reason: 'The antenna is empty.' };
    const id = byChoice.get(trimmed) ?? byName.get(trimmed.toLowerCase());
    if (id !== undefined) return { id };
    context.onUnknownAntenna?.(trimmed);
    if (mapping.unknownNames === 'make' && trimmed.length <= longestAntennaName) return { make: trimmed };
    const reason =
      mapping.unknownNames === 'make'
        ? `An antenna's name has at most ${longestAntennaName} characters; "${shorten(trimmed)}" has more.`
        : `"${shorten(trimmed)}" is no antenna of the station; add it, or say which one it is.`;
    return { field: 'antenna', reason };
  };
}

function shorten(text: string): string {
  return text.length > 40 ? `${text.slice(0, 40)}…` : text;
}
