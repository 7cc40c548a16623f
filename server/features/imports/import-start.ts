import type { DataSource } from 'typeorm';
import { readImportFile, UnreadableFile } from '../../database/import-file.ts';
import { InvalidRequest } from '../../platform/errors.ts';

/** Enough for thousands of rows: to guess from, to show, and to find the names that are used. */
const startBytes = 2 ** 20;

export interface FileStart {
  bytes: Buffer;
  /** The bytes are the whole file. */
  isWhole: boolean;
}

/** The first bytes of an uploaded file, unpacked. Throws InvalidRequest when it cannot be unpacked. */
export async function readFileStart(
  dataSource: DataSource,
  file: { stationId: number; importId: number; sizeBytes: number },
): Promise<FileStart> {
  const pieces: Buffer[] = [];
  let length = 0;
  try {
    for await (const { bytes } of readImportFile(dataSource, file)) {
      pieces.push(bytes);
      length += bytes.length;
      if (length >= startBytes) return { bytes: Buffer.concat(pieces), isWhole: false };
    }
  } catch (error) {
    if (!(error instanceof UnreadableFile)) throw error;
    // What can be read of a damaged file can be shown; the import says where it ends.
    if (length === 0)
      throw new InvalidRequest('The file cannot be read.', [{ path: 'file', message: error.message }]);
    return { bytes: Buffer.concat(pieces), isWhole: false };
  }
  return { bytes: Buffer.concat(pieces), isWhole: true };
}
