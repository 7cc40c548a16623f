import type { DwellMapping, ImportMapping, ImportPreview, SpotMapping } from '../contracts/import.ts';
import type { FileRecord } from './delimited.ts';
import { planDwells, type LoggedDwell } from './dwell-plan.ts';
import { createDwellRowReader, type DwellRow, type Named } from './dwell-rows.ts';
import { createFileReader } from './file-reader.ts';
import { formatInstant, MappingError, type ReadingContext } from './reading.ts';
import { createSpotRowReader, describeSpot, isFieldRefusal } from './spot-rows.ts';

/** Rows shown; more are read, to find the names that the station does not know. */
export const previewRows = 50;
const mostNames = 100;

type Preview = Omit<ImportPreview, 'guess'>;
type ReadRow = Preview['read'][number];

/**
 * Reads a file's first bytes (unpacked) exactly as the import would, and says what each of the first rows
 * becomes. A mapping that does not fit the file makes every row say why. `complete`: the bytes are the
 * whole file.
 */
export function previewFile(
  start: Buffer,
  complete: boolean,
  mapping: ImportMapping,
  context: ReadingContext,
  logged: readonly LoggedDwell[],
): Preview {
  const file = createFileReader(mapping);
  const records = file.push(start);
  if (complete) records.push(...file.end());
  const shown = records.slice(0, previewRows);
  const base = {
    header: [...(file.header ?? [])],
    rows: shown.map(({ lineNo, raw, cells }) => ({ lineNo, raw, cells })),
  };
  try {
    return mapping.kind === 'spots'
      ? { ...base, ...previewSpots(records, mapping, file.header, context) }
      : { ...base, ...previewDwells(records, mapping, file.header, context, logged) };
  } catch (error) {
    if (!(error instanceof MappingError)) throw error;
    const { path } = error.problems[0]!;
    const reason = error.message;
    const read = shown.map(({ lineNo }) => ({ lineNo, ok: false, reason, field: path, values: {} }));
    return { ...base, read, unknownReceivers: [], unknownAntennas: [] };
  }
}

function previewSpots(
  records: readonly FileRecord[],
  mapping: SpotMapping,
  header: readonly string[] | null,
  context: ReadingContext,
): Pick<Preview, 'read' | 'unknownReceivers' | 'unknownAntennas'> {
  const names: string[] = [];
  const readRow = createSpotRowReader(mapping, header, {
    ...context,
    onUnknownReceiver: (name) => names.push(name),
  });
  const callSigns = new Map(context.receivers.map(({ id, callSign }) => [id, callSign]));
  const read = records.map((record, i): ReadRow | null => {
    const outcome = readRow(record);
    if (i >= previewRows) return null;
    const { lineNo } = record;
    if (outcome === 'other receiver') {
      const reason = 'Left out: the receiver is not the station’s.';
      return { lineNo, ok: true, reason, field: 'receiver', values: {} };
    }
    if (isFieldRefusal(outcome)) return { lineNo, ok: false, ...outcome, values: {} };
    const values = describeSpot(outcome, (id) => callSigns.get(id) ?? '');
    return { lineNo, ok: true, reason: null, field: null, values };
  });
  return {
    read: read.filter((row) => row !== null),
    unknownReceivers: distinct(names),
    unknownAntennas: [],
  };
}

function previewDwells(
  records: readonly FileRecord[],
  mapping: DwellMapping,
  header: readonly string[] | null,
  context: ReadingContext,
  logged: readonly LoggedDwell[],
): Pick<Preview, 'read' | 'unknownReceivers' | 'unknownAntennas'> {
  const unknownReceivers: string[] = [];
  const unknownAntennas: string[] = [];
  const readRow = createDwellRowReader(mapping, header, {
    ...context,
    onUnknownReceiver: (name) => unknownReceivers.push(name),
    onUnknownAntenna: (name) => unknownAntennas.push(name),
  });
  const antennas = new Map(context.antennas.map(({ id, name }) => [id, name]));
  const receivers = new Map(context.receivers.map(({ id, callSign }) => [id, callSign]));
  const readings = records.map((record) => ({ record, ...readRow(record) }));
  const rows = readings.map(({ row }) => row).filter((row): row is DwellRow => row !== null);
  const plan = planDwells(rows, logged, (id) => antennas.get(id) ?? '');
  const refused = new Map(plan.refusals.map((refusal) => [refusal.lineNo, refusal]));
  const planned = new Map(plan.dwells.map((dwell) => [dwell.lineNo, dwell]));
  const nameOf = (named: Named, names: Map<number, string>) =>
    'id' in named ? (names.get(named.id) ?? '') : `${named.make} (new)`;
  const read = readings.slice(0, previewRows).map(({ record: { lineNo }, refusal }): ReadRow => {
    const fault = refusal ?? refused.get(lineNo);
    if (fault !== undefined && fault !== null) {
      return { lineNo, ok: false, reason: fault.reason, field: fault.field, values: {} };
    }
    const dwell = planned.get(lineNo);
    if (dwell === undefined) {
      return { lineNo, ok: true, reason: 'The switch log has this dwell already.', field: null, values: {} };
    }
    const values = {
      receiver: nameOf(dwell.receiver, receivers),
      antenna: nameOf(dwell.antenna, antennas),
      startsAt: formatInstant(dwell.startMs),
      endsAt: dwell.endMs === null ? 'still on' : formatInstant(dwell.endMs),
      note: dwell.note,
    };
    return { lineNo, ok: true, reason: null, field: null, values };
  });
  return { read, unknownReceivers: distinct(unknownReceivers), unknownAntennas: distinct(unknownAntennas) };
}

function distinct(names: readonly string[]): string[] {
  return [...new Set(names)].slice(0, mostNames);
}
