import { pipeline, Readable } from 'node:stream';
import { createGunzip } from 'node:zlib';
import type { DataSource } from 'typeorm';

/** The stored file cannot be unpacked, or unpacks to more than any log holds. The message is for people. */
export class UnreadableFile extends Error {
  override name = 'UnreadableFile';
}

export interface StoredFile {
  stationId: number;
  importId: number;
  /** Of the file as it was uploaded. */
  sizeBytes: number;
}

export interface UnpackedPiece {
  bytes: Buffer;
  /** How much of the stored file has been taken for it, 0 to 1. */
  share: number;
}

/** Text of spots packs to a fifth or a twentieth of its size; what packs better still is made to flood. */
const highestRatio = 200;
/** Below this a flood does no harm, and a short file of equal lines packs very well. */
const harmlessBytes = 64 * 2 ** 20;
/** Some hundred million spots. */
const mostUnpackedBytes = 16 * 2 ** 30;

const sliceBytes = 64 * 1024;
/** Small, so that what is made of a piece dies young: with larger ones the heap grows for nothing. */
const unpackedBytes = 64 * 1024;

/**
 * The bytes of an uploaded file, unpacked, in pieces: one stored chunk is in memory at a time. Throws
 * UnreadableFile, or what the database says.
 */
export async function* readImportFile(
  dataSource: DataSource,
  file: StoredFile,
): AsyncGenerator<UnpackedPiece, void, void> {
  const packedBytes = await countPackedBytes(dataSource, file);
  const gunzip = createGunzip({ chunkSize: unpackedBytes });
  const source = Readable.from(readSlices(dataSource, file), { objectMode: false });
  // Errors of the source reach the loop below through the unpacker that they destroy.
  pipeline(source, gunzip, () => undefined);
  let unpacked = 0;
  try {
    for await (const bytes of gunzip as AsyncIterable<Buffer>) {
      unpacked += bytes.length;
      refuseFlood(unpacked, file.sizeBytes);
      yield { bytes, share: Math.min(1, gunzip.bytesWritten / packedBytes) };
    }
  } catch (error) {
    if (!isPackingFault(error)) throw error;
    throw new UnreadableFile('The file is damaged: its gzip data ends too early or cannot be unpacked.');
  }
}

async function countPackedBytes(dataSource: DataSource, file: StoredFile): Promise<number> {
  const rows: { bytes: number | null }[] = await dataSource.query(
    'SELECT sum(octet_length(data))::bigint AS bytes FROM import_chunk WHERE station_id = $1 AND import_id = $2',
    [file.stationId, file.importId],
  );
  const bytes = rows[0]?.bytes ?? 0;
  if (bytes === 0) throw new UnreadableFile('The uploaded file is not here any more. Upload it again.');
  return bytes;
}

async function* readSlices(dataSource: DataSource, file: StoredFile): AsyncGenerator<Buffer, void, void> {
  for (let chunkNo = 0; ; chunkNo++) {
    const rows: { data: Buffer }[] = await dataSource.query(
      'SELECT data FROM import_chunk WHERE station_id = $1 AND import_id = $2 AND chunk_no = $3',
      [file.stationId, file.importId, chunkNo],
    );
    if (rows[0] === undefined) return;
    const { data } = rows[0];
    for (let at = 0; at < data.length; at += sliceBytes) yield data.subarray(at, at + sliceBytes);
  }
}

function refuseFlood(unpacked: number, sizeBytes: number): void {
  const isFlood = unpacked > harmlessBytes && unpacked > sizeBytes * highestRatio;
  if (!isFlood && unpacked <= mostUnpackedBytes) return;
  throw new UnreadableFile(
    isFlood
      ? `The file unpacks to more than ${highestRatio} times its size; no log of spots does. Upload it unpacked.`
      : `The file unpacks to more than ${mostUnpackedBytes / 2 ** 30} GB. Split it.`,
  );
}

function isPackingFault(error: unknown): boolean {
  const code = error instanceof Error && 'code' in error ? String(error.code) : '';
  return code.startsWith('Z_');
}
