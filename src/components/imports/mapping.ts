import { compileTimeFormat } from '../../../shared/imports/time-format.ts';
import { isRefusal } from '../../../shared/radio/place.ts';
import type {
  DwellMapping,
  ImportMapping,
  ImportPreview,
  SpotMapping,
} from '../../../shared/contracts/import.ts';

/** A column as a mapping names it: by its header's words, or by number (1 = first). */
export type ColumnRef = string | number;
export type ColumnName = keyof SpotMapping['columns'] | keyof DwellMapping['columns'];

export interface ColumnField {
  name: ColumnName;
  label: string;
  unit?: string;
  hint?: string;
  /** May stay without a column. */
  optional: boolean;
}

const spotFields: readonly ColumnField[] = [
  { name: 'time', label: 'Time', optional: false },
  { name: 'date', label: 'Date', hint: 'Where the date has a column of its own.', optional: true },
  { name: 'receiver', label: 'Receiver', optional: true },
  { name: 'call', label: 'Call sign heard', optional: false },
  { name: 'freq', label: 'Frequency', optional: false },
  { name: 'snr', label: 'SNR', unit: 'dB', optional: false },
  { name: 'mode', label: 'Mode', optional: true },
  { name: 'speed', label: 'Speed', unit: 'wpm', optional: true },
];
const dwellFields: readonly ColumnField[] = [
  { name: 'receiver', label: 'Receiver', optional: true },
  { name: 'antenna', label: 'Antenna', optional: false },
  { name: 'startsAt', label: 'Start', optional: false },
  {
    name: 'endsAt',
    label: 'End',
    hint: 'Without it each line ends where the receiver’s next one starts.',
    optional: true,
  },
  { name: 'note', label: 'Note', optional: true },
];

export function columnFields(kind: ImportMapping['kind']): readonly ColumnField[] {
  return kind === 'spots' ? spotFields : dwellFields;
}

/** What a row becomes, field by field, in the order in which it is shown. */
export function resultFields(kind: ImportMapping['kind']): readonly { name: string; label: string }[] {
  return kind === 'spots'
    ? [
        { name: 'time', label: 'Time (UTC)' },
        { name: 'receiver', label: 'Receiver' },
        { name: 'call', label: 'Call' },
        { name: 'freq', label: 'Frequency' },
        { name: 'band', label: 'Band' },
        { name: 'snr', label: 'SNR' },
        { name: 'mode', label: 'Mode' },
        { name: 'speed', label: 'Speed' },
      ]
    : [
        { name: 'receiver', label: 'Receiver' },
        { name: 'antenna', label: 'Antenna' },
        { name: 'startsAt', label: 'Start (UTC)' },
        { name: 'endsAt', label: 'End (UTC)' },
        { name: 'note', label: 'Note' },
      ];
}

export function columnOf(mapping: ImportMapping, name: ColumnName): ColumnRef | undefined {
  return (mapping.columns as Partial<Record<ColumnName, ColumnRef>>)[name];
}

/** Which column of the file a mapping means; -1 for none, and for one that the file does not have. */
export function columnIndex(column: ColumnRef | undefined, header: readonly string[], width: number): number {
  if (column === undefined) return -1;
  if (typeof column === 'number') return column <= width ? column - 1 : -1;
  const key = column.trim().toLowerCase();
  return header.findIndex((name) => name.trim().toLowerCase() === key);
}

/** As a mapping names a column: by the header's words where they are its own, else by number. */
export function columnAt(index: number, header: readonly string[]): ColumnRef {
  const name = header[index]?.trim() ?? '';
  const isOwn = header.findIndex((each) => each.trim().toLowerCase() === name.toLowerCase()) === index;
  return name !== '' && name.length <= 200 && isOwn ? name : index + 1;
}

/** The words of each column for choosing it: its header, or its number with an example. */
export function columnWords(preview: Pick<ImportPreview, 'header' | 'rows'> | null): string[] {
  const first = preview?.rows[0]?.cells ?? [];
  const header = preview?.header ?? [];
  return Array.from({ length: Math.max(header.length, first.length) }, (_, index) => {
    const name = header[index]?.trim() ?? '';
    const example = (first[index] ?? '').trim().slice(0, 24);
    if (name !== '') return name;
    return example === '' ? `column ${index + 1}` : `column ${index + 1} (${example})`;
  });
}

export function withColumn(
  mapping: ImportMapping,
  name: ColumnName,
  column: ColumnRef | undefined,
): ImportMapping {
  const columns = { ...mapping.columns, [name]: column };
  return { ...mapping, columns } as ImportMapping;
}

/** Says whether the first line is a header. Names mean nothing without one: they become numbers. */
export function withHeader(
  mapping: ImportMapping,
  hasHeader: boolean,
  header: readonly string[],
): ImportMapping {
  const next = { ...mapping, format: { ...mapping.format, hasHeader } };
  if (hasHeader) return next;
  const columns = Object.fromEntries(
    Object.entries(mapping.columns).map(([name, column]) => {
      const index = typeof column === 'string' ? columnIndex(column, header, header.length) : -1;
      return [name, index >= 0 ? index + 1 : column];
    }),
  );
  return { ...next, columns } as ImportMapping;
}

/** A saved mapping for the file at hand: its first day is this file's, never that of the file it was saved for. */
export function forThisFile(saved: ImportMapping, current: ImportMapping | null): ImportMapping {
  if (saved.kind !== 'spots') return saved;
  return { ...saved, firstDay: current?.kind === 'spots' ? current.firstDay : undefined };
}

/** The first sentence for each part of the mapping, from the server's paths (`body.mapping.columns.time`). */
export function mappingErrors(
  problem: { errors: readonly { path: string; message: string }[] } | null,
): Record<string, string> {
  const byPath: Record<string, string> = {};
  for (const { path, message } of problem?.errors ?? []) {
    byPath[path.replace(/^body\.(?:mapping\.)?/, '')] ??= message;
  }
  return byPath;
}

const mappingPaths = /^(?:columns\.|firstDay$|fixedReceiverId$|receiverNames\.|antennaNames\.|time\.)/;

/** What is wrong with the way times are said to be written, whatever the file; null when nothing is. */
export function timeFault(mapping: ImportMapping): string | null {
  const compiled = compileTimeFormat(mapping.time);
  return isRefusal(compiled) ? compiled.reason : null;
}

/** The times carry no date, so that the file's first day has to be given. */
export function isClockOnly(mapping: ImportMapping): boolean {
  if (mapping.kind === 'dwells') return false;
  if (mapping.layout === 'spot lines') return true;
  const compiled = compileTimeFormat(mapping.time);
  return !isRefusal(compiled) && compiled.clockOnly && mapping.columns.date === undefined;
}

/** Why the mapping as a whole does not fit the file: every row then says the same. Null when rows are read. */
export function mappingFault(
  preview: ImportPreview | null,
  mapping: ImportMapping,
): { path: string; message: string } | null {
  const first = preview?.read[0];
  if (!first || first.ok || first.field === null || first.reason === null) return null;
  const { field, reason } = first;
  const isOfMapping = mappingPaths.test(field) || (field === 'time' && timeFault(mapping) !== null);
  return isOfMapping ? { path: field, message: reason } : null;
}
