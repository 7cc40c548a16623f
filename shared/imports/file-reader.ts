import type { ImportMapping } from '../contracts/import.ts';
import { createTextDecoder } from './decode.ts';
import { createLineReader, createRecordReader, type FileRecord } from './delimited.ts';

export interface FileReader {
  /** Data records completed by these bytes; the header is not one of them. */
  push(bytes: Buffer): FileRecord[];
  end(): FileRecord[];
  /** The header's cells; null before it was seen and for files without one. */
  readonly header: readonly string[] | null;
}

/** From a file's bytes (unpacked) to its records, as a mapping says: the preview and the import both read with it. */
export function createFileReader(mapping: ImportMapping): FileReader {
  const { format, layout } = mapping;
  const decoder = createTextDecoder(format.encoding);
  const isTable = layout === 'table';
  const records = isTable ? createRecordReader(format) : createLineReader(format.skipLines);
  let awaitingHeader = isTable && format.hasHeader;
  let header: string[] | null = null;

  function withoutHeader(found: FileRecord[]): FileRecord[] {
    if (!awaitingHeader || found.length === 0) return found;
    awaitingHeader = false;
    const [first, ...others] = found;
    // A header that cannot be taken apart has no names: the columns are then said to be missing.
    header = first!.broken === null ? first!.cells : [];
    return others;
  }

  return {
    push: (bytes) => withoutHeader(records.push(decoder.write(bytes))),
    end() {
      const last = records.push(decoder.end());
      return withoutHeader(last.concat(records.end()));
    },
    get header() {
      return header;
    },
  };
}
