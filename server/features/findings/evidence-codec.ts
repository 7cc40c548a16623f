import { gunzipSync, gzipSync } from 'node:zlib';
import type { Evidence } from './evidence.ts';

/**
 * Frozen evidence in bytes, gzip-compressed. Version 1, little endian:
 *
 *     0   u32  0x45465757, the letters "WWFE"
 *     4   u32  version, 1
 *     8   u32  bytes of the text
 *     12  u32  0
 *     16  text: JSON in UTF-8, in which {"$column": type, "at": offset, "length": n} stands for a typed array
 *         and {"$map": [[key, value], ...]} for a Map
 *     then, at the next multiple of 8, the columns' bytes, each at a multiple of 8; offsets count from there
 *
 * The columns are named in the text, so that evidence frozen by another release can be read whatever
 * columns it had.
 */
const MAGIC = 0x45465757;
const VERSION = 1;
const HEADER_BYTES = 16;

const columnTypes = {
  Int8Array,
  Uint8Array,
  Int16Array,
  Uint16Array,
  Int32Array,
  Uint32Array,
  Float32Array,
  Float64Array,
};
type ColumnName = keyof typeof columnTypes;
type Column = InstanceType<(typeof columnTypes)[ColumnName]>;

export function packEvidence(evidence: Evidence): Uint8Array {
  const columns: Column[] = [];
  let size = 0;
  const text = Buffer.from(
    JSON.stringify(evidence, (_key, value: unknown) => {
      if (value instanceof Map) return { $map: [...value] };
      if (!ArrayBuffer.isView(value)) return value;
      const column = value as Column;
      const place = { $column: column.constructor.name, at: size, length: column.length };
      columns.push(column);
      size = aligned(size + column.byteLength);
      return place;
    }),
  );
  const start = aligned(HEADER_BYTES + text.length);
  const data = Buffer.alloc(start + size);
  data.writeUInt32LE(MAGIC, 0);
  data.writeUInt32LE(VERSION, 4);
  data.writeUInt32LE(text.length, 8);
  text.copy(data, HEADER_BYTES);
  let at = start;
  for (const column of columns) {
    data.set(new Uint8Array(column.buffer, column.byteOffset, column.byteLength), at);
    at = aligned(at + column.byteLength);
  }
  return gzipSync(data);
}

/** Throws RangeError for bytes that are no evidence of this version. */
export function unpackEvidence(packed: Uint8Array): Evidence {
  // A copy of its own: typed arrays can only look at multiples of their width.
  const data = new Uint8Array(gunzipSync(packed));
  const view = new DataView(data.buffer);
  if (data.length < HEADER_BYTES || view.getUint32(0, true) !== MAGIC)
    throw new RangeError('The bytes are not the evidence of a finding.');
  const version = view.getUint32(4, true);
  if (version !== VERSION)
    throw new RangeError(`The evidence has version ${version}; ${VERSION} can be read.`);
  const textLength = view.getUint32(8, true);
  const text = new TextDecoder().decode(data.subarray(HEADER_BYTES, HEADER_BYTES + textLength));
  const start = aligned(HEADER_BYTES + textLength);
  return JSON.parse(text, (_key, value: unknown) => {
    if (isMapNote(value)) return new Map(value.$map);
    if (!isColumnNote(value)) return value;
    const Type = columnTypes[value.$column];
    return new Type(data.buffer, start + value.at, value.length);
  }) as Evidence;
}

function aligned(offset: number): number {
  return Math.ceil(offset / 8) * 8;
}

function isMapNote(value: unknown): value is { $map: [unknown, unknown][] } {
  return typeof value === 'object' && value !== null && '$map' in value;
}

function isColumnNote(value: unknown): value is { $column: ColumnName; at: number; length: number } {
  return typeof value === 'object' && value !== null && '$column' in value;
}
