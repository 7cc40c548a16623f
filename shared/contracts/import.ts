import { z } from 'zod';
import { endpoint, id, instant, longId, shortText, stationParams } from './common.ts';

export const importKind = z.enum(['spots', 'dwells']);
export type ImportKind = z.infer<typeof importKind>;

/** A column by its header name, or by its number (1 = first) where the file has no header. */
const column = z.union([z.string().min(1).max(200), z.number().int().min(1).max(1000)]);

export const fileFormat = z.object({
  /** A byte order mark at the file's start rules over this. */
  encoding: z.enum(['utf-8', 'utf-16le', 'utf-16be', 'windows-1252', 'iso-8859-15']).default('utf-8'),
  delimiter: z.enum([',', ';', '\t', '|', ' ']).default(','),
  quote: z.enum(['"', "'", '']).default('"'),
  hasHeader: z.boolean().default(true),
  skipLines: z.number().int().min(0).max(1000).default(0),
  decimalComma: z.boolean().default(false),
});

/**
 * How a file's times are written. `pattern` uses yyyy (or yy), MM (or M, or MMM for English month names),
 * dd (or d), HH (or H), mm, ss and SSS; everything else in it stands for itself. A pattern without a date
 * takes its days from `firstDay`. `iso` takes ISO 8601; the epochs count from 1970-01-01 UTC. Times without
 * an offset are UTC unless a zone is named.
 */
export const timeFormat = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('iso'), zone: z.string().max(60).default('UTC') }),
  z.object({
    kind: z.literal('pattern'),
    pattern: z.string().min(4).max(40),
    zone: z.string().max(60).default('UTC'),
  }),
  z.object({ kind: z.literal('epoch seconds') }),
  z.object({ kind: z.literal('epoch milliseconds') }),
]);

export const spotMapping = z.object({
  kind: z.literal('spots'),
  /** `table`: delimited columns. `spot lines`: the trade's one-line telnet spots, whose day is given below. */
  layout: z.enum(['table', 'spot lines']),
  format: fileFormat,
  time: timeFormat,
  columns: z.object({
    time: column.optional(),
    /** Where date and clock stand in two columns. */
    date: column.optional(),
    receiver: column.optional(),
    call: column.optional(),
    freq: column.optional(),
    snr: column.optional(),
    mode: column.optional(),
    speed: column.optional(),
  }),
  freqUnit: z.enum(['kHz', 'MHz', 'Hz']).default('kHz'),
  /** For files of one receiver that do not name it. */
  fixedReceiverId: id.optional(),
  /** Name in the file -> receiver of the station; names not listed must equal a receiver's call sign. */
  receiverNames: z.record(z.string(), id).default({}),
  /** Receivers in the file that are not the station's: leave out quietly (counted), or refuse. */
  otherReceivers: z.enum(['skip', 'refuse']).default('refuse'),
  /** The UTC day of the first line, for layouts that carry only a clock. */
  firstDay: z.iso.date().optional(),
  timeKnownTo: z.enum(['second', 'minute']).default('second'),
});
export const dwellMapping = z.object({
  kind: z.literal('dwells'),
  layout: z.literal('table'),
  format: fileFormat,
  time: timeFormat,
  columns: z.object({
    receiver: column.optional(),
    antenna: column,
    startsAt: column,
    /** Absent: each line ends where the receiver's next one starts. */
    endsAt: column.optional(),
    note: column.optional(),
  }),
  fixedReceiverId: id.optional(),
  receiverNames: z.record(z.string(), id).default({}),
  antennaNames: z.record(z.string(), id).default({}),
  /** Names that the station does not know yet: make receivers and antennas of them, or refuse the lines. */
  unknownNames: z.enum(['make', 'refuse']).default('refuse'),
});
export const importMapping = z.discriminatedUnion('kind', [spotMapping, dwellMapping]);
export type FileFormat = z.infer<typeof fileFormat>;
export type TimeFormat = z.infer<typeof timeFormat>;
export type SpotMapping = z.infer<typeof spotMapping>;
export type DwellMapping = z.infer<typeof dwellMapping>;
export type ImportMapping = z.infer<typeof importMapping>;

export const importState = z.enum([
  'uploading',
  'uploaded',
  'queued',
  'running',
  'done',
  'failed',
  'cancelled',
  'undone',
]);
export const importRecord = z.object({
  id,
  kind: importKind,
  fileName: z.string(),
  sha256: z.string().nullable(),
  sizeBytes: z.number(),
  state: importState,
  mapping: importMapping.nullable(),
  rowsRead: z.number(),
  rowsStored: z.number(),
  rowsDoubled: z.number(),
  rowsRefused: z.number(),
  /** Of receivers that are not the station's, left out as the mapping says. */
  rowsSkipped: z.number(),
  rowsUndone: z.number(),
  bytesDone: z.number(),
  rowsPerSecond: z.number().nullable(),
  secondsLeft: z.number().nullable(),
  firstAt: instant.nullable(),
  lastAt: instant.nullable(),
  error: z.string().nullable(),
  createdBy: z.string().nullable(),
  createdAt: instant,
  finishedAt: instant.nullable(),
  jobId: longId.nullable(),
  /** An earlier import of the very same bytes. */
  sameAsImportId: id.nullable(),
});
export type ImportRecord = z.infer<typeof importRecord>;

const importParams = stationParams.extend({ importId: id });
export const listImports = endpoint({
  method: 'GET',
  path: '/stations/:stationId/imports',
  summary: 'Imports, newest first',
  params: stationParams,
  query: z.object({
    after: z.string().max(40).optional(),
    limit: z.coerce.number().int().min(1).max(200).default(50),
  }),
  reply: z.object({ items: z.array(importRecord), next: z.string().nullable() }),
});
export const readImport = endpoint({
  method: 'GET',
  path: '/stations/:stationId/imports/:importId',
  summary: 'One import and how far it is',
  params: importParams,
  reply: importRecord,
});
/** Multipart: field `file`; `kind` in the query so that it is known before the first byte. */
export const uploadImport = endpoint({
  method: 'POST',
  path: '/stations/:stationId/imports',
  summary: 'Upload a file, plain or gzip; it is kept as it is and read once a mapping is chosen',
  params: stationParams,
  query: z.object({ kind: importKind }),
  reply: importRecord,
  status: 201,
  media: { request: 'multipart/form-data' },
});
/** Header, first rows as they would be read, and a guess at the format: for choosing the mapping. */
export const importPreview = z.object({
  guess: importMapping,
  header: z.array(z.string()),
  rows: z.array(z.object({ lineNo: z.number().int(), raw: z.string(), cells: z.array(z.string()) })),
  read: z.array(
    z.object({
      lineNo: z.number().int(),
      ok: z.boolean(),
      reason: z.string().nullable(),
      field: z.string().nullable(),
      /** What the row would become, by field name, as text. */
      values: z.record(z.string(), z.string()),
    }),
  ),
  unknownReceivers: z.array(z.string()),
  unknownAntennas: z.array(z.string()),
});
export type ImportPreview = z.infer<typeof importPreview>;
export const previewImport = endpoint({
  method: 'POST',
  path: '/stations/:stationId/imports/:importId/preview',
  summary: 'Read the first rows under a mapping (or a guessed one) without storing anything',
  params: importParams,
  body: z.object({ mapping: importMapping.optional() }),
  reply: importPreview,
});
export const startImport = endpoint({
  method: 'POST',
  path: '/stations/:stationId/imports/:importId/start',
  summary: 'Read the whole file under a mapping; follow the import for progress',
  params: importParams,
  body: z.object({ mapping: importMapping }),
  reply: importRecord,
  status: 202,
});
export const cancelImport = endpoint({
  method: 'POST',
  path: '/stations/:stationId/imports/:importId/cancel',
  summary: 'Stop an import and take back what it has stored so far',
  params: importParams,
  reply: importRecord,
  status: 202,
});
export const undoImport = endpoint({
  method: 'POST',
  path: '/stations/:stationId/imports/:importId/undo',
  summary: 'Remove exactly what an import added',
  params: importParams,
  reply: importRecord,
  status: 202,
});
export const importRefusal = z.object({
  lineNo: z.number(),
  field: z.string().nullable(),
  reason: z.string(),
  raw: z.string(),
});
export const listImportRefusals = endpoint({
  method: 'GET',
  path: '/stations/:stationId/imports/:importId/refusals',
  summary: 'Refused lines with their reasons, in file order',
  params: importParams,
  query: z.object({
    after: z.string().max(40).optional(),
    limit: z.coerce.number().int().min(1).max(500).default(100),
  }),
  reply: z.object({
    items: z.array(importRefusal),
    next: z.string().nullable(),
    reasons: z.array(z.object({ reason: z.string(), lines: z.number() })),
  }),
});
export const downloadImportRefusals = endpoint({
  method: 'GET',
  path: '/stations/:stationId/imports/:importId/refusals.csv',
  summary:
    'Refused lines as CSV: line, field and reason before the columns of the file itself (or before `raw`, the whole line, where it has no header). Correct it and upload it like any other file',
  params: importParams,
  reply: z.string(),
  media: { reply: 'text/csv' },
});

export const savedMapping = z.object({ id, kind: importKind, name: z.string(), mapping: importMapping });
export const listMappings = endpoint({
  method: 'GET',
  path: '/stations/:stationId/mappings',
  summary: 'Saved column mappings',
  params: stationParams,
  reply: z.object({ items: z.array(savedMapping) }),
});
export const saveMapping = endpoint({
  method: 'PUT',
  path: '/stations/:stationId/mappings',
  summary: 'Save a column mapping under a name (the same name replaces it)',
  params: stationParams,
  body: z.object({ name: shortText(60), mapping: importMapping }),
  reply: savedMapping,
});
export const removeMapping = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/mappings/:mappingId',
  summary: 'Forget a saved column mapping',
  params: stationParams.extend({ mappingId: id }),
  status: 204,
});
